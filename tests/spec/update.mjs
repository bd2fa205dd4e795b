// Writes what is made from the program's rows, the examples and real runs: parts of api-spec/openapi.json and of the pages.
//   node tests/spec/update.mjs build/release/coresoak       (then build again: the specification is part of the program)
import { writeFileSync } from 'node:fs';
import { join, resolve } from 'node:path';
import { layout } from './layout.mjs';
import { madePage, pages } from './pages.mjs';
import { completed, root, specificationPath, specificationText } from './specification.mjs';

const program = resolve(process.argv[2] ?? 'build/release/coresoak');
writeFileSync(specificationPath, layout(completed(JSON.parse(specificationText()), program)) + '\n');
for (const page of pages) writeFileSync(join(root, page), madePage(page, program));
