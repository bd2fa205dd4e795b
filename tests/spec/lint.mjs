// Lints the specification with the usual rules and those of this house.
import { createConfig, lintFromString } from '@redocly/openapi-core';
import { check, expect } from './tally.mjs';

const HOUSE = {
  extends: ['recommended'],
  rules: {
    'no-unused-components': 'error',
    'operation-operationId-unique': 'error',
    'operation-summary': 'error',
    'tag-description': 'error',
    'no-invalid-media-type-examples': 'error',
    'no-invalid-schema-examples': 'error',
    'path-segment-plural': 'off',
    'operation-4xx-response': 'error',
    'parameter-description': 'error',
    'no-required-schema-properties-undefined': 'off',
  },
};

async function findings(text) {
  const config = await createConfig(HOUSE);
  const found = await lintFromString({ source: text, absoluteRef: 'openapi.json', config });
  return found.map((f) => `${f.severity} ${f.ruleId} ${f.location?.[0]?.pointer ?? ''}: ${f.message}`);
}

export async function checkLint(text) {
  await check('the specification is lint clean', async () => {
    const found = await findings(text);
    expect(found.length === 0, found.join('\n'));
  });
  await check('a planted broken reference is found', async () => {
    const found = await findings(text.replace('#/components/schemas/result"', '#/components/schemas/resutl"'));
    expect(found.some((f) => f.includes('no-unresolved-refs')), 'it was not');
  });
  await check('a planted wrong example is found', async () => {
    const broken = JSON.parse(text);
    broken.paths['/v1/solves'].post.requestBody.content['application/json'].examples.plate_soak.value.part.shpae = 'plate';
    const found = await findings(JSON.stringify(broken));
    expect(found.some((f) => f.includes('no-invalid-media-type-examples')), 'it was not');
  });
}
