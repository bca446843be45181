import { readdirSync, readFileSync } from 'node:fs'
import { fileURLToPath } from 'node:url'
import { describe, expect, it } from 'vitest'

const root = fileURLToPath(new URL('..', import.meta.url))
const read = (file: string): string => readFileSync(`${root}/${file}`, 'utf8')
const number = /\b(?:ALM|DSP|SIG|REC|PRO|FOU|EXO|STA|USR)-\d+\b/g

interface Row {
  readonly id: string
  readonly words: string
  readonly shown: readonly { readonly file: string; readonly test: string }[]
}
const rows: Row[] = read('tests/requirements.md')
  .split('\n')
  .filter((line) => line.startsWith('| ') && !/^\| (number|---)/.test(line))
  .map((line) => {
    const [, id = '', words = '', by = ''] = line.split(/(?<!\\)\|/).map((cell) => cell.trim())
    return { id, words, shown: [...by.matchAll(/`([^`]+)`: “(.+?)”(?=<br>|$)/g)].map((m) => ({ file: m[1]!, test: m[2]! })) }
  })

/** Quoted texts of a test file as vitest gets them, near enough: escapes of quotes undone. */
const sources = new Map(
  readdirSync(`${root}/tests`, { recursive: true, encoding: 'utf8' })
    .filter((file) => file.endsWith('.test.ts'))
    .map((file) => `tests/${file.replaceAll('\\', '/')}`)
    .map((file) => [file, read(file).replaceAll(/\\(['"`])/g, '$1')]),
)

describe('the table of requirements', () => {
  it('numbers its rows well, each once, in the order of their groups, with words and a test in each', () => {
    const groups = ['ALM', 'DSP', 'SIG', 'REC', 'PRO', 'FOU', 'EXO', 'STA', 'USR']
    const rank = (id: string): number => groups.indexOf(id.slice(0, 3)) * 100 + Number(id.slice(4))
    for (const { id, words, shown } of rows) {
      expect(id).toMatch(/^(ALM|DSP|SIG|REC|PRO|FOU|EXO|STA|USR)-\d{2}$/)
      expect(words.length, id).toBeGreaterThan(20)
      expect(shown.length, id).toBeGreaterThan(0)
    }
    expect(rows.length).toBeGreaterThan(40)
    expect(rows.map((r) => r.id)).toEqual([...new Set(rows.map((r) => r.id))].sort((a, b) => rank(a) - rank(b)))
  })

  it('names only tests that exist, by file and name', () => {
    const absent = rows.flatMap(({ id, shown }) =>
      shown
        .filter(({ file, test }) => !["'", '"', '`'].some((q) => sources.get(file)?.includes(`${q}${test}${q}`)))
        .map(({ file, test }) => `${id}: ${file}: ${test}`),
    )
    expect(absent).toEqual([])
  })

  it('has every number that a test cites', () => {
    const known = new Set(rows.map((r) => r.id))
    const missing = [...sources].flatMap(([file, text]) =>
      [...text.matchAll(number)].filter((m) => !known.has(m[0])).map((m) => `${file}: ${m[0]}`),
    )
    expect(missing).toEqual([])
  })
})
