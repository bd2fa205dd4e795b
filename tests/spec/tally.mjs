// Counts checks; the last line is "N passed, N failed".
let passed = 0;
let failed = 0;

export async function check(name, body) {
  try {
    await body();
    passed += 1;
    console.log(`ok    ${name}`);
  } catch (error) {
    failed += 1;
    console.log(`FAIL  ${name}\n        ${String(error?.message ?? error).replaceAll('\n', '\n        ')}`);
  }
}

export function expect(condition, words) {
  if (!condition) throw new Error(words);
}

export function same(got, wanted, words) {
  const a = JSON.stringify(got);
  const b = JSON.stringify(wanted);
  if (a !== b) throw new Error(`${words}: got ${a?.slice(0, 600)}, wanted ${b?.slice(0, 600)}`);
}

export function tally() {
  console.log(`${passed} passed, ${failed} failed`);
  return failed === 0 ? 0 : 1;
}
