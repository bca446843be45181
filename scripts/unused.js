// node scripts unused: functions and constants that server/core exports and no other file of server/ or web/ uses.
import { readdirSync, readFileSync } from 'node:fs'
import { dirname, join } from 'node:path'
import { root } from './prepare.js'

const sources = (folder) =>
  readdirSync(join(root, folder), { recursive: true, encoding: 'utf8' })
    .map((f) => `${folder}/${f.replaceAll('\\', '/')}`)
    .filter((f) => f.endsWith('.ts') && !f.endsWith('.d.ts'))
const withoutComments = (text) => text.replaceAll(/\/\*[\s\S]*?\*\/|(?<=^|\s)\/\/.*$/gm, '')
const names = (list) =>
  list
    .split(',')
    .map((n) => n.trim())
    .filter((n) => n !== '' && !n.startsWith('type '))
const targetOf = (from, path) => join(dirname(from), path).replaceAll('\\', '/')

/** `file name` of everything that a file imports from others. */
function importsOf(file, text) {
  const used = []
  for (const [, list, from] of text.matchAll(/^import \{([^}]*)\} from '(\.[^']+)'/gm))
    for (const n of names(list)) used.push(`${targetOf(file, from)} ${n.split(/\s+as\s+/)[0]}`)
  for (const [, list, from] of text.matchAll(/\{([^}]*)\} = await import\('(\.[^']+)'\)/g))
    for (const n of names(list)) used.push(`${targetOf(file, from)} ${n.split(':')[0].trim()}`)
  return used
}

/**
 * Values that `server/core` exports and nobody outside their file uses, as { file, name, kind }:
 *   dead      its own file does not use it either: tests alone do, or nobody
 *   internal  its own file uses it and no test does: it need not be exported
 * What its own file uses and a test holds to its source (a published correlation inside a larger one) may stay exported. Types are left out:
 * they name what a function takes and gives. A re-export is no use by itself. Errors: for `export *` or `import *`, which would hide what is used.
 */
export function unusedExports() {
  const read = (folder) => sources(folder).map((f) => [f, withoutComments(readFileSync(join(root, f), 'utf8'))])
  const files = new Map([...read('server'), ...read('web')])
  const used = new Set([...files].flatMap(([f, text]) => importsOf(f, text)))
  const tested = new Set(read('tests').flatMap(([f, text]) => importsOf(f, text)))
  const exported = []
  const passedOn = []
  for (const [file, text] of files) {
    if (!file.startsWith('server/core/')) continue
    if (/^(export|import) (type )?\*/m.test(text)) throw new Error(`${file}: * hides what is used`)
    for (const [, name] of text.matchAll(/^export (?:async )?(?:const|let|function\*?|class) (\w+)/gm))
      exported.push({ file, name })
    for (const [, list, from] of text.matchAll(/^export \{([^}]*)\}(?: from '(\.[^']+)')?/gm))
      for (const n of names(list)) {
        const [inner, name = inner] = n.split(/\s+as\s+/)
        exported.push({ file, name })
        if (from !== undefined) passedOn.push([`${file} ${name}`, `${targetOf(file, from)} ${inner}`])
      }
  }
  for (const [outer, inner] of passedOn) if (used.has(outer)) used.add(inner)
  const kindOf = ({ file, name }) => {
    if (used.has(`${file} ${name}`)) return null
    const inside =
      !passedOn.some(([outer]) => outer === `${file} ${name}`) && files.get(file).match(new RegExp(`\\b${name}\\b`, 'g')).length > 1
    if (!inside) return 'dead'
    return tested.has(`${file} ${name}`) ? null : 'internal'
  }
  return exported.map((e) => ({ ...e, kind: kindOf(e) })).filter((e) => e.kind !== null)
}

/** Prints them, one a line. */
export function unused() {
  const found = unusedExports()
  for (const { file, name, kind } of found) process.stdout.write(`${kind.padEnd(8)}  ${file}  ${name}\n`)
  process.stdout.write(`${found.length} exports of server/core that no other file of server/ or web/ uses\n`)
}
