import { execFileSync } from 'node:child_process'
import { existsSync, readdirSync, readFileSync } from 'node:fs'
import { fileURLToPath } from 'node:url'
import { describe, expect, it } from 'vitest'
import { commands } from '../server/cli/run.ts'
import { verdictRules } from '../server/core/bank/verdicts.ts'

const root = fileURLToPath(new URL('..', import.meta.url))
const read = (file: string): string => readFileSync(`${root}/${file}`, 'utf8')
const pkg = JSON.parse(read('package.json'))

/** Files under version control, or all but the ignored where there is no git. */
function files(): string[] {
  try {
    return execFileSync('git', ['ls-files', '-z', '--cached', '--others', '--exclude-standard'], {
      cwd: root,
      encoding: 'utf8',
      stdio: ['ignore', 'pipe', 'ignore'],
    })
      .split('\0')
      .filter((f) => f !== '' && existsSync(`${root}/${f}`))
  } catch {
    return readdirSync(root, { recursive: true, withFileTypes: true })
      .filter((e) => e.isFile())
      .map((e) => `${e.parentPath}/${e.name}`.slice(root.length).replace(/^\/+/, ''))
      .filter((f) => !/^(node_modules|dist|\.git|\.clearbore)\//.test(f))
  }
}
const isText = (f: string): boolean => /\.(ts|js|json|jsonc|md|css|html|yaml|yml|svg|csv)$|(^|\/)(LICENSE|\.gitignore|run)$/.test(f)

describe('package.json', () => {
  it('has scripts that run on every system: no shell operator and no path separator in any', () => {
    for (const [name, script] of Object.entries<string>(pkg.scripts)) expect(script, name).not.toMatch(/&&|\|\||[;|<>$`&/\\'"]/)
    expect(Object.keys(pkg.scripts)).toEqual(
      expect.arrayContaining(['start', 'test', 'soak', 'bench', 'lint', 'format', 'typecheck', 'build']),
    )
  })

  it('has scripts that scripts/index.js knows', () => {
    const tasks = [...read('scripts/index.js').matchAll(/^ {2}(\w+): async/gm)].map((m) => m[1])
    for (const script of Object.values<string>(pkg.scripts)) expect(tasks).toContain(/^node scripts (\w+)$/.exec(script)?.[1])
  })

  it('pins every package to one version, and the lock file has the same', () => {
    const lock = JSON.parse(read('package-lock.json')).packages
    const wanted = Object.entries<string>({ ...pkg.dependencies, ...pkg.devDependencies })
    for (const [name, version] of wanted) {
      expect(version, name).toMatch(/^\d+\.\d+\.\d+$/)
      expect(lock[`node_modules/${name}`]?.version, name).toBe(version)
    }
    expect(wanted.length).toBeGreaterThan(15)
  })

  it('names Node 20.19 as the least, MIT as the licence, and a command that exists', () => {
    expect(pkg).toMatchObject({ engines: { node: '>=20.19' }, license: 'MIT', private: true, type: 'module' })
    expect(read(pkg.bin.clearbore).startsWith('#!/usr/bin/env node\n')).toBe(true)
    expect(read('LICENSE')).toContain('Copyright (c) 2026 Clearbore contributors')
  })
})

describe('the checkout', () => {
  it('holds at its top level what was agreed and nothing else', () => {
    const top = [...new Set(files().map((f) => f.split('/')[0]!))].filter((f) => !f.startsWith('.')).sort()
    const agreed = [
      'DEVELOPERS.md',
      'LICENSE',
      'README.md',
      'fixtures',
      'package-lock.json',
      'package.json',
      'scripts',
      'server',
      'tests',
      'tsconfig.json',
      'web',
    ]
    expect(top).toEqual(agreed)
  })

  it('ignores what is installed, built, stored or logged', () => {
    expect(read('.gitignore').trim().split('\n')).toEqual(expect.arrayContaining(['node_modules/', 'dist/', '.clearbore/']))
  })

  it('names no place of one machine in any file', () => {
    // In pieces, so that this file names none either; log of a browser or a user's home alike.
    const places = new RegExp(
      `(?<![\\w.])/(${['home', 'root', 'Users', 'work', 'opt'].join('|')})/[\\w.-]+|\\b[A-Z]:\\\\{1,2}(Users|work)`,
    )
    const named = files()
      .filter((f) => isText(f) && f !== 'package-lock.json')
      .filter((f) => places.test(read(f)))
    expect(named).toEqual([])
  })

  it('leaves no note of unfinished work behind', () => {
    const mark = new RegExp(`\\b(${['TO', 'FIX'].map((a, i) => a + ['DO', 'ME'][i]).join('|')}|X{3})\\b`)
    expect(files().filter((f) => isText(f) && f !== 'package-lock.json' && !f.endsWith('.csv') && mark.test(read(f)))).toEqual([])
  })
})

describe('README.md', () => {
  const readme = read('README.md')

  it('has a row for each command, and no other', () => {
    const rows = [...readme.matchAll(/^\| `([a-z-]+)[^`]*` \|/gm)].map((m) => m[1])
    const table = rows.slice(rows.indexOf('serve'), rows.indexOf('self-check') + 1)
    expect(table.sort()).toEqual(commands.map((c) => c.name).sort())
  })

  it('explains each field of a report', () => {
    const keys = new Set<string>()
    JSON.parse(read('fixtures/runs/heron-evening.expected.json'), function (this: unknown, key, value) {
      if (!Array.isArray(this) && key !== '') keys.add(key)
      return value
    })
    for (const reason of ['out-of-range', 'loop-failure', 'missing', 'frozen', 'spike', 'unreadable']) keys.delete(reason)
    expect([...keys].filter((key) => !readme.includes(`\`${key}\``))).toEqual([])
  })

  it('links only to files that exist', () => {
    for (const page of ['README.md', 'DEVELOPERS.md', 'fixtures/README.md'])
      for (const [, target] of read(page).matchAll(/\]\(([^)#][^)]*)\)/g)) {
        const folder = page.includes('/') ? page.slice(0, page.lastIndexOf('/') + 1) : ''
        expect(existsSync(`${root}/${folder}${target}`), `${page}: ${target}`).toBe(true)
      }
  })

  it('shows every picture there is', () => {
    const folder = `${root}/fixtures/pictures`
    const pictures = existsSync(folder) ? readdirSync(folder).filter((f) => f.endsWith('.png')) : []
    expect(pictures.filter((f) => !readme.includes(`fixtures/pictures/${f}`))).toEqual([])
  })
})

describe('DEVELOPERS.md', () => {
  const guide = read('DEVELOPERS.md')

  it('names every folder of server, and of its core', () => {
    const folders = files().flatMap((f) => /^server\/(core\/)?(?!core\/)([^/]+\/)/.exec(f)?.[2] ?? [])
    expect(folders.length).toBeGreaterThan(100)
    expect([...new Set(folders)].filter((folder) => !new RegExp(`(^|\\s)${folder}`, 'm').test(guide))).toEqual([])
  })

  it('states the margins of the fouling verdict as they are', () => {
    const { deposit, other, blockage } = verdictRules
    expect(guide).toContain(`L is above ${deposit.likelihood}, it has grown by more than ${100 * deposit.size} %`)
    expect(guide).toContain(
      `beats the best rival by ${deposit.margin} nats, or ${deposit.margin + deposit.driftingTap} where a tap is known to drift`,
    )
    expect(guide).toContain(`accepted above ${other.likelihood},`)
    expect(guide).toContain(`A lone rise of more than ${100 * blockage} % at once is a blockage`)
  })
})
