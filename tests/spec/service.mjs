// Starts the service on a free port and talks to it.
import { spawn } from 'node:child_process';
import { mkdtempSync, readFileSync, rmSync } from 'node:fs';
import { request } from 'node:http';
import { tmpdir } from 'node:os';
import { join } from 'node:path';

const pause = (ms) => new Promise((done) => setTimeout(done, ms));

export async function startService(program, ...flags) {
  const folder = mkdtempSync(join(tmpdir(), 'coresoak-'));
  const portFile = join(folder, 'port');
  const child = spawn(program, ['serve', '--listen', '127.0.0.1:0', '--port-file', portFile, '--quiet', ...flags], { stdio: ['ignore', 'ignore', 'pipe'] });
  let log = '';
  child.stderr.on('data', (bytes) => { log += bytes; });
  const ended = new Promise((done) => child.once('exit', (code, signal) => done(code ?? signal)));
  const port = await portIn(portFile, child).catch((error) => { throw new Error(`${error.message}\n${log}`); });

  async function stop() {
    child.kill('SIGTERM');
    const code = await Promise.race([ended, pause(30000).then(() => 'still running')]);
    if (code === 'still running') child.kill('SIGKILL');
    rmSync(folder, { recursive: true });
    return code;
  }
  return { ask: (method, path, options) => ask(port, method, path, options), stop, log: () => log };
}

async function portIn(file, child) {
  for (let i = 0; i < 200 && child.exitCode === null; i += 1) {
    try {
      const port = Number(readFileSync(file, 'utf8'));
      if (port > 0) return port;
    } catch { /* not written yet */ }
    await pause(50);
  }
  throw new Error('the service did not start');
}

function ask(port, method, path, { body, headers = {} } = {}) {
  return new Promise((done, fail) => {
    const bytes = body === undefined ? undefined : typeof body === 'string' ? body : JSON.stringify(body);
    const all = { ...(bytes === undefined ? {} : { 'Content-Type': 'application/json', 'Content-Length': Buffer.byteLength(bytes) }), ...headers };
    const call = request({ host: '127.0.0.1', port, method, path, headers: all }, (answer) => {
      const parts = [];
      answer.on('data', (part) => parts.push(part));
      answer.on('end', () => done({ status: answer.statusCode, headers: answer.headers, body: Buffer.concat(parts).toString('utf8') }));
      answer.on('error', fail);
    });
    call.on('error', fail);
    call.end(bytes);
  });
}
