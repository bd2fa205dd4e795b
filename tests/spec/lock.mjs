// The lock file pins versions and sums, and names no place to fetch them from.
import { join } from 'node:path';
import { readJson, root } from './specification.mjs';
import { check, expect, same } from './tally.mjs';

export async function checkLock() {
  const lock = readJson(join(root, 'tests', 'spec', 'package-lock.json'));
  const packages = Object.entries(lock.packages).filter(([path]) => path !== '');
  await check('the lock names no registry', () => same(packages.filter(([, p]) => p.resolved).map(([path]) => path), [], 'resolved'));
  await check('every package of the lock has its sum', () => {
    expect(packages.length > 0, 'no packages');
    same(packages.filter(([, p]) => !p.integrity).map(([path]) => path), [], 'without');
  });
}
