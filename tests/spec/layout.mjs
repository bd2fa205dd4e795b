// JSON as people read it: what fits on a line stands on one.
const WIDTH = 110;

export function layout(value, indent = '') {
  const flat = oneLine(value);
  if (typeof value !== 'object' || value === null || indent.length + flat.length <= WIDTH) return flat;
  const inner = indent + '  ';
  if (Array.isArray(value)) return wrapped('[', value.map((v) => layout(v, inner)), ']', indent);
  const members = Object.entries(value).map(([k, v]) => `${JSON.stringify(k)}: ${layout(v, inner)}`);
  return wrapped('{', members, '}', indent);
}

function oneLine(value) {
  if (typeof value !== 'object' || value === null) return JSON.stringify(value);
  if (Array.isArray(value)) return `[${value.map(oneLine).join(', ')}]`;
  return `{${Object.entries(value).map(([k, v]) => `${JSON.stringify(k)}: ${oneLine(v)}`).join(', ')}}`;
}

// Short items share lines, so that a column of numbers does not take a line a number.
function wrapped(open, items, close, indent) {
  const inner = indent + '  ';
  if (!items.every((item) => item.length < 24 && !item.includes('\n'))) {
    return `${open}\n${items.map((item) => inner + item).join(',\n')}\n${indent}${close}`;
  }
  const lines = [];
  for (const item of items) {
    const last = lines.length - 1;
    if (last >= 0 && inner.length + lines[last].length + item.length + 3 <= WIDTH) lines[last] += `, ${item}`;
    else lines.push(item);
  }
  return `${open}\n${lines.map((line) => inner + line).join(',\n')}\n${indent}${close}`;
}
