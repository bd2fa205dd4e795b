// Judges values and HTTP answers by the specification.
import Ajv from 'ajv/dist/2020.js';
import addFormats from 'ajv-formats';

export function judge(specification) {
  const ajv = new Ajv({ allErrors: true, strict: true, strictTypes: false, strictRequired: false });
  addFormats(ajv);
  for (const word of ['discriminator', 'example']) ajv.addKeyword(word);
  for (const word of ['openapi', 'info', 'servers', 'security', 'tags', 'paths', 'components', 'x-schemas-from-rows']) ajv.addKeyword(word);
  ajv.addSchema(specification, 'specification');

  const validators = new Map();
  const byPointer = (pointer) => {
    if (!validators.has(pointer)) validators.set(pointer, ajv.compile({ $ref: `specification#${pointer}` }));
    return validators.get(pointer);
  };

  // Faults of a value by a named schema, as text; empty if there are none.
  function faultsOf(name, value) {
    return faultsAt(`/components/schemas/${name}`, value);
  }

  function faultsAt(pointer, value) {
    const validate = byPointer(pointer);
    if (validate(value)) return '';
    return validate.errors.slice(0, 8).map((e) => `${e.instancePath || '(whole)'} ${e.message} ${JSON.stringify(e.params)}`).join('\n');
  }

  const resolved = (object, pointer) => {
    if (!object?.$ref) return [object, pointer];
    const at = object.$ref.slice(1);
    return [at.split('/').slice(1).reduce((o, key) => o[key], specification), at];
  };

  const escaped = (key) => key.replaceAll('~', '~0').replaceAll('/', '~1');

  // What an answer does that the specification does not say; empty if nothing.
  function surprises(template, method, answer) {
    const operation = specification.paths[template]?.[method];
    if (!operation) return `${method} ${template} is not in the specification`;
    if (!operation.responses[answer.status]) return `status ${answer.status} is not in the specification`;
    const where = `/paths/${escaped(template)}/${method}/responses/${answer.status}`;
    const [response, pointer] = resolved(operation.responses[answer.status], where);
    const said = Object.keys(response.headers ?? {}).map((h) => h.toLowerCase());
    for (const header of ['location', 'retry-after', 'etag', 'preference-applied', 'allow'])
      if (answer.headers[header] !== undefined && !said.includes(header)) return `header ${header} is not in the specification`;
    const type = (answer.headers['content-type'] ?? '').split(';')[0];
    if (!type && !response.content) return '';
    if (!response.content?.[type]) return `${type || 'no content type'} is not in the specification for ${answer.status}`;
    if (!type.endsWith('json')) return '';
    return faultsAt(`${pointer}/content/${escaped(type)}/schema`, JSON.parse(answer.body));
  }

  return { faultsOf, surprises };
}
