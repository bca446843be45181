import { readdirSync, readFileSync } from 'node:fs'
import { dirname, join, relative } from 'node:path'
import { fileURLToPath } from 'node:url'
import { describe, expect, it } from 'vitest'

const core = fileURLToPath(new URL('../../server/core/', import.meta.url))
const sources = readdirSync(core, { recursive: true, encoding: 'utf8' })
  .filter((f) => f.endsWith('.ts'))
  .map((f) => ({ file: f.replaceAll('\\', '/'), text: readFileSync(join(core, f), 'utf8') }))

describe('the core is pure', () => {
  it('imports itself and simple-statistics, no other package, no Node, no shell', () => {
    expect(sources.length).toBeGreaterThan(100)
    const outside = sources.flatMap(({ file, text }) =>
      [...text.matchAll(/(?:\bfrom |\bimport\(|^import )'([^'\s]+)'/gm)]
        .map((m) => m[1]!)
        .filter((name) =>
          name.startsWith('.') ? relative(core, join(core, dirname(file), name)).startsWith('..') : name !== 'simple-statistics',
        )
        .map((name) => `${file}: ${name}`),
    )
    expect(outside).toEqual([])
  })

  it('asks no clock, no chance, no process, no console and no locale', () => {
    const impure =
      /\b(Date\.now|new Date\(\)|performance\.|Math\.random|process\.(?:env|argv|exit|cwd|std\w+|nextTick|hrtime|memoryUsage|pid|on)\b|console\.|setTimeout|setInterval|fetch\(|crypto\.|Intl\.|toLocale)/
    expect(
      sources.filter(({ text }) => impure.test(text.replaceAll(/\/\*[\s\S]*?\*\/|\/\/.*$/gm, ''))).map(({ file }) => file),
    ).toEqual([])
  })
})
