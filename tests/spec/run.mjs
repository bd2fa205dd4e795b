// All checks of the specification: node run.mjs PROGRAM
import { checkLint } from './lint.mjs';
import { checkExamples } from './examples.mjs';
import { judge } from './judge.mjs';
import { checkLive } from './live.mjs';
import { checkDocuments, checkMade } from './made.mjs';
import { checkLock } from './lock.mjs';
import { startService } from './service.mjs';
import { specificationText } from './specification.mjs';
import { check, same, tally } from './tally.mjs';

const program = process.argv[2];
const text = specificationText();
const specification = JSON.parse(text);
const judgement = judge(specification);

await checkLock();
await checkLint(text);
await checkMade(specification, program);
await checkDocuments(judgement);
const service = await startService(program);
try {
  await checkExamples(program, service, judgement);
  await checkLive(service, judgement, specification);
} finally {
  const code = await service.stop();
  await check('the service stops with 0 when told to', () => same(code, 0, 'exit code'));
}
process.exit(tally());
