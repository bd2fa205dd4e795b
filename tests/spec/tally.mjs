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

// The two as JSON from shortly before they part.
export function same(got, wanted, words) {
  const a = JSON.stringify(got) ?? 'nothing';
  const b = JSON.stringify(wanted) ?? 'nothing';
  if (a === b) return;
  let at = 0;
  while (a[at] === b[at]) at += 1;
  const near = (text) => text.slice(Math.max(0, at - 60), at + 240);
  throw new Error(`${words}:\ngot    ${near(a)}\nwanted ${near(b)}`);
}

export function tally() {
  console.log(`${passed} passed, ${failed} failed`);
  return failed === 0 ? 0 : 1;
}
