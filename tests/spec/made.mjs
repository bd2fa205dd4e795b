// What the specification says must be what the program's rows, the examples and the tests' documents say.
import { readdirSync, existsSync } from 'node:fs';
import { join } from 'node:path';
import { check, expect, same } from './tally.mjs';
import { madePage, pages, pageText } from './pages.mjs';
import { completed, examples, readJson, root, specificationPath } from './specification.mjs';

// Members against each other, so that a difference is told by its name.
function sameMembers(got, wanted, words) {
  for (const name of new Set([...Object.keys(got), ...Object.keys(wanted)])) same(got[name], wanted[name], `${words} ${name}`);
}

export async function checkMade(specification, program) {
  const made = completed(readJson(specificationPath), program);
  await check('the schemas of a case are those of the rows (node tests/spec/update.mjs)', () => {
    same(specification['x-schemas-from-rows'], made['x-schemas-from-rows'], 'names');
    sameMembers(specification.components.schemas, made.components.schemas, 'schema');
  });
  await check('the examples in the specification are the files, and a real run', () => {
    const content = (s) => s.paths['/v1/solves'].post;
    same(content(specification).requestBody.content, content(made).requestBody.content, 'requests');
    same(content(specification).responses['200'].content, content(made).responses['200'].content, 'answer');
  });
  for (const page of pages)
    await check(`${page} shows real runs`, () => {
      const lines = madePage(page, program).split('\n');
      pageText(page).split('\n').forEach((line, i) => same(line, lines[i], `line ${i + 1}`));
      expect(pageText(page).includes('<!-- shows: '), 'it shows none');
    });
}

// Documents that the reader takes must be valid by the schema too, or a generated client could not send them.
export async function checkDocuments(judgement) {
  for (const example of examples())
    await check(`example ${example.name} is valid by the schema`, () => {
      const faults = judgement.faultsOf('case', example.document);
      expect(faults === '', faults);
    });
  const folder = join(root, 'tests', 'reader', 'valid');
  for (const name of existsSync(folder) ? readdirSync(folder).sort() : []) {
    const path = join(folder, name, 'request.json');
    if (!existsSync(path)) continue;
    await check(`reader/valid/${name} is valid by the schema`, () => {
      const faults = judgement.faultsOf('case', readJson(path));
      expect(faults === '', faults);
    });
  }
  await checkRefused(judgement);
}

// A schema that takes everything would pass the above.
async function checkRefused(judgement) {
  const first = examples()[0].document;
  const broken = {
    'an unknown member': { ...first, tile: 'x' },
    'a case without stages': { ...first, stages: undefined },
    'a negative emissivity': withCondition(first, { radiation: { emissivity: -0.1, surroundings: 20 } }),
    'an unknown condition': withCondition(first, { furnance: {} }),
    'two conditions of a union': { ...first, start: { profile: [[0, 20]], steady: { faces: {} } } },
    'an unknown kind of figure': { ...first, figures: [{ name: 'f', kind: 'maximum', of: 'mean' }] },
    'a figure with the member of another': { ...first, figures: [{ name: 'f', kind: 'peak', of: 'mean', above: 20 }] },
    'a number as a name': { ...first, points: [{ name: 7, at: 'center' }] },
  };
  for (const [words, document] of Object.entries(broken))
    await check(`the schema refuses ${words}`, () => expect(judgement.faultsOf('case', JSON.parse(JSON.stringify(document))) !== '', 'it takes it'));
}

function withCondition(document, condition) {
  return { ...document, stages: [{ name: 's', lasts: 60, faces: { all: condition } }] };
}
