import { homedir, platform } from 'node:os'
import { join } from 'node:path'
import { describe, expect, it } from 'vitest'
import type { Io } from '../../server/cli/command.ts'
import { keyFolderOf, storeOptions, tellSigning } from '../../server/cli/key-folder.ts'

const io = (env?: Io['env']) => {
  const said = { out: '', err: '' }
  const its: Io = {
    out: async (text) => {
      said.out += text
    },
    err: (text) => {
      said.err += text
    },
    errIsTerminal: false,
    outIsTerminal: false,
    nowMs: () => 0,
    signal: new AbortController().signal,
    ...(env === undefined ? {} : { env }),
  }
  return { it: its, said }
}

describe('the folder of keys', () => {
  it('is CLEARBORE_KEYS where that is set, an option before it, and nothing without an environment', () => {
    expect(keyFolderOf({ CLEARBORE_KEYS: '/k', XDG_STATE_HOME: '/s' })).toBe('/k')
    expect(storeOptions(io({ CLEARBORE_KEYS: '/k' }).it, '/option').keys).toBe('/option')
    expect(storeOptions(io({ CLEARBORE_KEYS: '/k' }).it).keys).toBe('/k')
    expect(storeOptions(io().it)).not.toHaveProperty('keys')
  })
  it.runIf(platform() === 'linux')('is else the state folder of this user', () => {
    expect(keyFolderOf({ CLEARBORE_KEYS: '', XDG_STATE_HOME: '/s' })).toBe('/s/clearbore/keys')
    expect(keyFolderOf({})).toBe(join(homedir(), '.local/state/clearbore/keys'))
  })
  it('tells a new key on stdout with its fingerprint, trouble on stderr, and nothing on an ordinary day', async () => {
    const base = { store: 's', key: 'ab'.repeat(32), fingerprint: 'cd'.repeat(16), madeIn: null, trouble: null }
    const quiet = io()
    await tellSigning(quiet.it, base)
    expect(quiet.said).toEqual({ out: '', err: '' })
    const made = io()
    await tellSigning(made.it, { ...base, madeIn: '/k' })
    expect(made.said).toEqual({
      out: expect.stringMatching(/lies in \/k; keep a copy apart[\s\S]*fingerprint {2}(cd){16}/),
      err: '',
    })
    const broken = io()
    await tellSigning(broken.it, { ...base, key: null, fingerprint: null, trouble: 'heads are not signed: no disk' })
    expect(broken.said).toEqual({ out: '', err: 'heads are not signed: no disk\n' })
  })
})
