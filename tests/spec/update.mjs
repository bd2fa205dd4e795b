// Writes into api-spec/openapi.json what is made from the program's rows and from the examples:
//   node tests/spec/update.mjs build/release/coresoak
import { writeFileSync } from 'node:fs';
import { layout } from './layout.mjs';
import { completed, specificationPath, specificationText } from './specification.mjs';

const specification = completed(JSON.parse(specificationText()), process.argv[2] ?? 'build/release/coresoak');
writeFileSync(specificationPath, layout(specification) + '\n');
