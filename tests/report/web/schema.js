// The outputs of a run against their published schemas, by validators that other people wrote: results.json by a JSON Schema
// validator (ajv), every table by the Table Schema implementation of the people behind that format (datapackage, tableschema).
// What a schema must refuse is tried too. Usage: node schema.js FOLDER
'use strict';
const fs = require('fs');
const path = require('path');
const Ajv = require('ajv/dist/2020').default;
const { Package } = require('datapackage');
const { Table } = require('tableschema');

let failed = 0;
function check(ok, what) {
  if (ok) return;
  failed++;
  console.error('failed: ' + what);
}

function results(folder) {
  const read = (name) => JSON.parse(fs.readFileSync(path.join(folder, name), 'utf8'));
  const ajv = new Ajv({ strict: true, allowUnionTypes: true, allErrors: true });
  ajv.addKeyword('unit');
  const valid = ajv.compile(read('results.schema.json')), whole = read('results.json');
  check(valid(whole), 'results.json: ' + ajv.errorsText(valid.errors).slice(0, 400));
  const spoilt = [
    ['a number as text', (r) => { r.samples[0].spacing_nm = '312'; }],
    ['a column that is gone', (r) => { delete r.images[0].px_nm; }],
    ['a count with a fraction', (r) => { r.images[0].n_features = 1.5; }],
    ['a digest that is none', (r) => { r.manifest.inputs[0].sha256 = 'abc'; }],
    ['a part that is gone', (r) => { delete r.series; }],
    ['a light that does not exist', (r) => { r.spectra[0].polarization = 'x'; }],
  ];
  for (const [what, spoil] of spoilt) {
    const copy = structuredClone(whole);
    spoil(copy);
    check(!valid(copy), 'the schema refuses ' + what);
  }
  return whole;
}

async function tables(folder, whole) {
  const descriptor = JSON.parse(fs.readFileSync(path.join(folder, 'datapackage.json'), 'utf8'));
  const pack = await Package.load(descriptor, { basePath: folder });
  check(pack.valid, 'datapackage.json: ' + pack.errors.map((e) => e.message).slice(0, 3).join('; '));
  for (const resource of descriptor.resources) {
    const table = await Table.load(path.join(folder, resource.path), { schema: resource.schema });
    let rows = 0;
    try {
      rows = (await table.read({ keyed: true })).length; // header, types, constraints and primary key of every row
    } catch (error) {
      check(false, `${resource.path}: ${(error.errors && error.errors[0] ? error.errors[0] : error).message}`);
    }
    if (!resource.name.startsWith('features')) check(rows > 0, `${resource.path} has rows`); // a picture may hold no feature
    if (resource.name === 'samples') check(rows === whole.samples.length, 'a row for every sample');
  }
  const wrong = structuredClone(descriptor.resources[0].schema);
  wrong.fields[0].type = 'number'; // file names are none
  const table = await Table.load(path.join(folder, descriptor.resources[0].path), { schema: wrong });
  check(await table.read().then(() => false, () => true), 'the validator refuses a wrong type');
}

(async () => {
  const folder = process.argv[2];
  await tables(folder, results(folder));
  process.exit(failed ? 1 : 0);
})().catch((e) => { console.error(e); process.exit(1); });
