// The specification and the files that it is made with.
import { spawnSync } from 'node:child_process';
import { readdirSync, readFileSync } from 'node:fs';
import { dirname, join } from 'node:path';
import { fileURLToPath } from 'node:url';

export const root = join(dirname(fileURLToPath(import.meta.url)), '..', '..');
export const specificationPath = join(root, 'api-spec', 'openapi.json');
export const specificationText = () => readFileSync(specificationPath, 'utf8');
export const readJson = (path) => JSON.parse(readFileSync(path, 'utf8'));

export function run(program, ...words) {
  const done = spawnSync(program, words, { encoding: 'utf8', maxBuffer: 64 << 20 });
  if (done.error) throw done.error;
  return { code: done.status, out: done.stdout, err: done.stderr };
}

// Name, path, document and what is expected of every example.
export function examples() {
  const folder = join(root, 'api-spec', 'examples');
  return readdirSync(folder)
    .filter((file) => file.endsWith('.json'))
    .sort()
    .map((file) => ({
      name: file.replace(/\.json$/, ''),
      path: join(folder, file),
      document: readJson(join(folder, file)),
      expected: readJson(join(folder, 'expected', file)),
    }));
}

// The schemas of a case, as the rows of the program have them.
export const schemasFromRows = (program) => JSON.parse(run(program, 'schema').out);

const FIRST = 'plate_soak';

export function requestExamples() {
  return Object.fromEntries(examples().map((e) => [e.name, { summary: e.document.title, value: e.document }]));
}

export function resultExample(program) {
  const first = examples().find((e) => e.name === FIRST);
  return { [FIRST]: { summary: first.document.title, value: JSON.parse(run(program, 'solve', first.path).out) } };
}

// The specification with everything in it that is made from other files.
export function completed(specification, program) {
  const made = schemasFromRows(program);
  const before = specification['x-schemas-from-rows'] ?? [];
  const schemas = specification.components.schemas;
  for (const name of before) delete schemas[name];
  for (const [name, schema] of Object.entries(made)) schemas[name] = schema;
  specification['x-schemas-from-rows'] = Object.keys(made);
  const solve = specification.paths['/v1/solves'].post;
  solve.requestBody.content['application/json'].examples = requestExamples();
  solve.responses['200'].content['application/json'].examples = resultExample(program);
  return specification;
}
