// The contract, asked of a running service: each answer is judged by the specification.
import { examples } from './specification.mjs';
import { check, expect, same } from './tally.mjs';

const UNKNOWN_JOB = '/v1/jobs/00000000000000000000000000000000';

export async function checkLive(service, judgement, specification) {
  const first = examples().find((e) => e.name === 'plate_soak').document;

  // Asks, and requires the status and that nothing in the answer is unknown to the specification.
  async function asked(template, method, status, path, options) {
    const answer = await service.ask(method.toUpperCase(), path ?? template, options);
    same(answer.status, status, answer.body.slice(0, 400));
    same(judgement.surprises(template, method, answer), '', 'surprises');
    return answer;
  }
  const solve = (status, body, headers) => asked('/v1/solves', 'post', status, undefined, { body, headers });
  const faultsOf = (answer) => JSON.parse(answer.body).faults ?? [];

  await checkRefusals(solve, faultsOf, first);
  await checkJobs(solve, asked, service, first);
  await checkEndings(solve, asked);
  await checkMaterials(asked);
  await checkOperation(asked, specification);
  await checkAddresses(service, judgement);
}

async function checkRefusals(solve, faultsOf, first) {
  await check('422 lists every fault with its place', async () => {
    const broken = { ...first, part: { ...first.part, thickness: '-3 mm', matrial: 'x' }, start: '25 mm' };
    const at = faultsOf(await solve(422, broken)).map((f) => f.at);
    for (const place of ['/part/thickness', '/part/matrial', '/start']) expect(at.includes(place), `${place} is not among ${at}`);
  });
  await check('422 for a numerical error that is too fine', async () => {
    const [fault] = faultsOf(await solve(422, { ...first, numerical_error: '1e-9 K' }));
    same(fault.at, '/numerical_error', 'place');
  });
  await check('400 names line and column', async () => {
    const [fault] = faultsOf(await solve(400, '{\n  "part": nil\n}'));
    expect(/line 2/.test(fault.is), fault.is);
  });
  await check('400 for a duplicate member', () => solve(400, '{"start": 20, "start": 30}'));
  await check('413 for a body over the limit', () => solve(413, `{"title": "${'x'.repeat(5 << 20)}"}`));
  await check('415 for another type', () => solve(415, 'a,b', { 'Content-Type': 'text/csv' }));
  await check('406 for a form that is not offered', () => solve(406, first, { Accept: 'image/png' }));
  await check('417 for an unknown expectation', () => solve(417, first, { Expect: 'a-miracle' }));
}

async function checkJobs(solve, asked, service, first) {
  let id;
  await check('202 with respond-async, the job at Location', async () => {
    const answer = await solve(202, { ...first, labels: { lot: 'B7' } }, { Prefer: 'respond-async' });
    same(answer.headers['preference-applied'], 'respond-async', 'Preference-Applied');
    expect(Number(answer.headers['retry-after']) >= 0, 'no Retry-After');
    id = answer.headers.location.match(/^\/v1\/jobs\/([^/]+)$/)[1];
  });
  await check('the job is done in the end', async () => {
    let job;
    for (let i = 0; i < 200; i += 1) {
      job = JSON.parse((await asked('/v1/jobs/{id}', 'get', 200, `/v1/jobs/${id}`)).body);
      if (job.state === 'done') break;
      await new Promise((done) => setTimeout(done, 50));
    }
    same([job.id, job.state, job.kind], [id, 'done', 'solve'], 'job');
  });
  await check('it stands in the list', async () => {
    const list = JSON.parse((await asked('/v1/jobs', 'get', 200)).body);
    expect(list.jobs.some((job) => job.id === id), 'it does not');
  });
  await check('its result, and 304 for who has it', async () => {
    const answer = await asked('/v1/jobs/{id}/result', 'get', 200, `/v1/jobs/${id}/result`);
    expect(/^"[^"]+"$/.test(answer.headers.etag), 'no strong ETag');
    await asked('/v1/jobs/{id}/result', 'get', 304, `/v1/jobs/${id}/result`, { headers: { 'If-None-Match': answer.headers.etag } });
  });
  await check('its history as text/csv', async () => {
    const withHistory = { ...first, output: { history: { every: '5 min' } } };
    const answer = await solve(200, withHistory, { Accept: 'text/csv' });
    same(answer.body.split('\r\n')[0], 'time [s],core [degC]', 'heading');
  });
  await check('stages, figures and verdict as text/plain', async () => {
    const answer = await solve(200, first, { Accept: 'text/plain' });
    expect(answer.body.includes('Verdict') && answer.body.includes(first.figures[0].name), answer.body.slice(0, 200));
  });
  await check('409 when an ended job is cancelled', () => asked('/v1/jobs/{id}', 'delete', 409, `/v1/jobs/${id}`));
  await check('404 for an unknown job', async () => {
    await asked('/v1/jobs/{id}', 'get', 404, UNKNOWN_JOB);
    await asked('/v1/jobs/{id}', 'delete', 404, UNKNOWN_JOB);
    await asked('/v1/jobs/{id}/result', 'get', 404, `${UNKNOWN_JOB}/result`);
  });
}

// A front of solidification at a very small error takes many seconds: long enough to be stopped.
async function checkEndings(solve, asked) {
  const long = { ...examples().find((e) => e.name === 'casting_in_mould').document, numerical_error: '0.002 K' };
  await check('a running job is cancelled: 410 for its result', async () => {
    const answer = await solve(202, long, { Prefer: 'respond-async' });
    const path = answer.headers.location;
    await asked('/v1/jobs/{id}/result', 'get', 409, `${path}/result`);
    const job = JSON.parse((await asked('/v1/jobs/{id}', 'delete', 200, path)).body);
    same(job.state, 'cancelled', 'state');
    await asked('/v1/jobs/{id}/result', 'get', 410, `${path}/result`);
  });
  await check('a job beyond its time: 504, and failed', async () => {
    const answer = await solve(504, { ...long, job: { time_limit: '0.1 s' } }, { Prefer: 'wait=30' });
    const job = JSON.parse((await asked('/v1/jobs/{id}', 'get', 200, answer.headers.location)).body);
    same([job.state, job.failure.status], ['failed', 504], 'job');
  });
  await check('jobs are listed by state', async () => {
    const list = JSON.parse((await asked('/v1/jobs', 'get', 200, '/v1/jobs?state=failed')).body).jobs;
    expect(list.length > 0 && list.every((job) => job.state === 'failed'), JSON.stringify(list).slice(0, 300));
  });
  await check('400 for a state that is none', () => asked('/v1/jobs', 'get', 400, '/v1/jobs?state=lost'));
}

async function checkMaterials(asked) {
  await check('the library, at least 40 materials', async () => {
    const list = JSON.parse((await asked('/v1/materials', 'get', 200)).body).materials;
    expect(list.length >= 40, `${list.length}`);
  });
  await check('a material with values at temperatures', async () => {
    const answer = await asked('/v1/materials/{name}', 'get', 200, '/v1/materials/carbon_steel?at=20,400');
    const { values } = JSON.parse(answer.body);
    // EN 1993-1-2:2005, 3.4.1.3: 54 - 0.0333 T below 800 degC
    same(values.conductivity.map((k) => Math.round(k * 1000) / 1000), [53.334, 40.68], 'conductivity');
  });
  await check('404 for an unknown material', () => asked('/v1/materials/{name}', 'get', 404, '/v1/materials/unobtainium'));
  await check('400 for temperatures that are none', () => asked('/v1/materials/{name}', 'get', 400, '/v1/materials/carbon_steel?at=warm'));
}

async function checkOperation(asked, specification) {
  await check('/healthz', () => asked('/healthz', 'get', 200));
  await check('/readyz', () => asked('/readyz', 'get', 200));
  await check('/metrics', async () => expect((await asked('/metrics', 'get', 200)).body.includes('coresoak_'), 'no metric of ours'));
  await check('/openapi.json is the specification', async () => same(JSON.parse((await asked('/openapi.json', 'get', 200)).body), specification, 'it'));
}

async function checkAddresses(service, judgement) {
  await check('405 names the methods', async () => {
    for (const [template, method] of [['/v1/solves', 'post'], ['/v1/jobs', 'get'], ['/healthz', 'get']]) {
      const answer = await service.ask('PATCH', template);
      same(answer.status, 405, template);
      expect(answer.headers.allow?.includes(method.toUpperCase()), `Allow: ${answer.headers.allow}`);
      same(judgement.surprises(template, method, answer), '', 'surprises');
    }
  });
  await check('404 elsewhere is a problem', async () => {
    const answer = await service.ask('GET', '/v2/solves');
    same([answer.status, answer.headers['content-type'].split(';')[0]], [404, 'application/problem+json'], 'answer');
    same(judgement.faultsOf('problem', JSON.parse(answer.body)), '', 'problem');
  });
}
