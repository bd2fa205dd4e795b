// Every example runs, on the command line and as a request, with the outcome that its file in expected/ states.
import { readFileSync } from 'node:fs';
import { examples, run } from './specification.mjs';
import { check, expect, same } from './tally.mjs';

export async function checkExamples(program, service, judgement) {
  for (const example of examples()) {
    const done = run(program, 'solve', example.path);
    await check(`${example.name}: exit code`, () => same(done.code, example.expected.exit, done.err));
    await check(`${example.name}: outcome`, () => checkOutcome(JSON.parse(done.out), example.expected));
    await check(`${example.name}: the result is as the specification says`, () => {
      const faults = judgement.faultsOf('result', JSON.parse(done.out));
      expect(faults === '', faults);
    });
    await check(`${example.name}: the service answers the same bytes`, async () => {
      const answer = await service.ask('POST', '/v1/solves', { body: readFileSync(example.path, 'utf8'), headers: { Prefer: 'wait=30' } });
      same(answer.status, 200, answer.body);
      same(judgement.surprises('/v1/solves', 'post', answer), '', 'surprises');
      expect(answer.body === done.out, 'they differ');
    });
  }
}

// Verdict, what the warnings are about, and each figure's value within the limits stated.
function checkOutcome(result, expected) {
  same(result.verdict, expected.verdict, 'verdict');
  same([...new Set(result.warnings.map((w) => w.at))].sort(), [...expected.warnings_at].sort(), 'warnings at');
  same(Object.keys(result.figures), Object.keys(expected.figures), 'figures');
  for (const [name, [low, high]] of Object.entries(expected.figures)) {
    const { value, unit } = result.figures[name];
    expect(value >= low && value <= high, `${name} is ${value} ${unit}, expected ${low} to ${high}`);
  }
}
