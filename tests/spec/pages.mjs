// Pages that show real runs. A line "<!-- shows: WHAT ARGUMENT -->" stands before each block that is made here.
import { readFileSync } from 'node:fs';
import { join } from 'node:path';
import { layout } from './layout.mjs';
import { root, run } from './specification.mjs';

export const pages = ['README.md', 'api-spec/examples/README.md'];
export const pageText = (page) => readFileSync(join(root, page), 'utf8');

const example = (name) => join(root, 'api-spec', 'examples', `${name}.json`);
const block = (language, text) => `\`\`\`${language}\n${text.trimEnd()}\n\`\`\``;

// Of long texts the beginning.
const wrap = (line, width) => (line.length <= width ? [line] : fold(line, width));
function fold(line, width) {
  const indent = line.match(/^ */)[0] + '  ';
  const at = line.lastIndexOf(' ', width);
  return at <= indent.length ? [line] : [line.slice(0, at), ...wrap(indent + line.slice(at + 1), width)];
}

const makers = {
  // the file of an example
  case: (program, name) => block('json', readFileSync(example(name), 'utf8')),
  // its result without what is the same everywhere
  answer: (program, name) => {
    const { record, warnings, cautions, ...rest } = JSON.parse(run(program, 'solve', example(name)).out);
    return block('json', layout(rest));
  },
  // its result for a person, without the cautions
  brief: (program, name) => block('', run(program, 'solve', '--brief', example(name)).out.split('\nCautions')[0].split('\n').flatMap((line) => wrap(line, 150)).join('\n')),
  // the head of its history
  csv: (program, name) => block('', run(program, 'solve', '--csv', example(name)).out.split('\r\n').slice(0, 4).join('\n')),
  // what the reader says of a case with faults
  faults: (program, name) => {
    const document = JSON.parse(readFileSync(example(name), 'utf8'));
    document.part = { shape: 'plate', thicknes: '50 mm', material: 'carbon_stel' };
    document.start = '25 mm';
    const done = runWith(program, JSON.stringify(document));
    return block('json', layout(JSON.parse(done.out)));
  },
  // every flag
  flags: (program) => run(program, 'flags').out.trimEnd(),
  // the help of a command
  help: (program, command) => block('', run(program, 'help', command).out),
};

function runWith(program, input) {
  return run('sh', '-c', `printf '%s' "$1" | "$0" check - 2>/dev/null`, program, input);
}

// A page with every block made anew: the lines up to the next blank line outside of a fence are replaced.
export function madePage(page, program) {
  const lines = pageText(page).split('\n');
  const made = [];
  for (let i = 0; i < lines.length; i += 1) {
    made.push(lines[i]);
    const shows = lines[i].match(/^<!-- shows: (\w+) ?(\w*) -->$/);
    if (!shows) continue;
    i = endOfBlock(lines, i + 1);
    made.push(makers[shows[1]](program, shows[2]), '');
  }
  return made.join('\n');
}

function endOfBlock(lines, from) {
  let fenced = false;
  let i = from;
  for (; i < lines.length && (fenced || lines[i] !== ''); i += 1) if (lines[i].startsWith('```')) fenced = !fenced;
  return i;
}
