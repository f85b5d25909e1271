// The part of .ci/outside that reads with programs from npm:
//   node outside.mjs BASE FOLDER SCHEMAS NODE_MODULES PATH...
// BASE is the running server, FOLDER its unpacked data package, PATHs are pages
// that hold JSON-LD. Prints a line a check; exits 1 when one failed.
import { readFileSync } from 'node:fs'
import { createRequire } from 'node:module'
import { join } from 'node:path'

const [base, folder, schemas, modules] = process.argv.slice(2)
const need = createRequire(join(modules, 'here.js'))
const Ajv = need('ajv').default
const Ajv04 = need('ajv-draft-04').default
const formats = need('ajv-formats').default
const yaml = need('yaml')
const jsonld = need('jsonld')
const { Package } = need('datapackage')

let failed = 0
function check (what, errors) {
  if (errors && errors.length) {
    failed++
    console.log(`FAILED  ${what}`)
    for (const e of errors.slice(0, 5)) console.log(`        ${typeof e === 'string' ? e : e.instancePath + ' ' + e.message}`)
    return
  }
  console.log(`ok      ${what}`)
}
const read = name => readFileSync(join(folder, name), 'utf8')
const schema = name => JSON.parse(readFileSync(join(schemas, name), 'utf8'))
function against (A, name, value) {
  const ajv = new A({ strict: false, allErrors: true })
  formats(ajv)
  ajv.addFormat('textarea', true) // says how to edit a text, not what it holds
  return ajv.validate(schema(name), value) ? [] : ajv.errors
}

// Frictionless: the descriptor by its schemas, then the tables by its reader.
const descriptor = JSON.parse(read('datapackage.json'))
check('datapackage.json by the schema of a data package', against(Ajv04, 'data-package.json', descriptor))
for (const r of descriptor.resources.filter(r => r.profile === 'tabular-data-resource')) {
  check(`resource ${r.name} by the schema of a tabular data resource`, against(Ajv04, 'tabular-data-resource.json', r))
  check(`fields of ${r.name} by the schema of a table schema`, against(Ajv04, 'table-schema.json', r.schema))
}
const pack = await Package.load(join(folder, 'datapackage.json'))
check('datapackage.json as npm datapackage reads it', pack.errors.map(String))
for (const r of pack.resources.filter(r => r.tabular)) {
  try {
    const rows = await r.read({ relations: await r.checkRelations() })
    check(`${r.name}: ${rows.length} rows hold types, limits and relations`, rows.length ? [] : ['no rows'])
  } catch (e) {
    check(`${r.name}: rows hold types, limits and relations`, e.multiple ? e.errors.map(String) : [String(e)])
  }
}

check('CITATION.cff by the schema of the format', against(Ajv, 'citation-file-format-1.2.0.json', yaml.parse(read('CITATION.cff'))))

// JSON-LD, with no network: the contexts are what they say they are.
const contexts = { 'https://schema.org/': { '@context': { '@vocab': 'https://schema.org/' } }, 'http://www.w3.org/ns/csvw': { '@context': { '@vocab': 'http://www.w3.org/ns/csvw#' } } }
const documentLoader = async url => {
  const document = contexts[url] ?? contexts[url + '/']
  if (!document) throw new Error('an unexpected context: ' + url)
  return { document, documentUrl: url, contextUrl: null }
}
for (const path of process.argv.slice(6)) {
  const page = await (await fetch(base + path)).text()
  const found = [...page.matchAll(/<script type="application\/ld\+json">(.*?)<\/script>/gs)].map(m => m[1])
  const types = []
  try {
    for (const text of found) for (const node of await jsonld.expand(JSON.parse(text), { documentLoader })) types.push(...(node['@type'] ?? []))
    check(`JSON-LD of ${path}: ${types.join(', ')}`, types.includes('https://schema.org/Dataset') ? [] : ['no Dataset in it'])
  } catch (e) {
    check(`JSON-LD of ${path}`, [String(e)])
  }
}

// CSVW metadata is JSON-LD too; its rules are checked by TestDataPackage.
try {
  const nodes = await jsonld.expand(JSON.parse(read('csv-metadata.json')), { documentLoader })
  check('csv-metadata.json as JSON-LD', nodes.length ? [] : ['nothing in it'])
} catch (e) {
  check('csv-metadata.json as JSON-LD', [String(e)])
}
process.exit(failed ? 1 : 0)
