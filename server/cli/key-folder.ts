import { homedir, platform } from 'node:os'
import { join } from 'node:path'
import type { StoreOptions } from '../store/open.ts'
import type { Signing } from '../store/seals.ts'
import type { Io } from './command.ts'
import { toolVersion } from './install.ts'

type Env = Readonly<Record<string, string | undefined>>

/** Where the keys of stores lie: CLEARBORE_KEYS, else the folder where programs of this user keep their state. */
export function keyFolderOf(env: Env): string {
  const named = env['CLEARBORE_KEYS']
  if (named !== undefined && named !== '') return named
  const state =
    platform() === 'win32'
      ? (env['LOCALAPPDATA'] ?? join(homedir(), 'AppData', 'Local'))
      : platform() === 'darwin'
        ? join(homedir(), 'Library', 'Application Support')
        : (env['XDG_STATE_HOME'] ?? join(homedir(), '.local', 'state'))
  return join(state, 'clearbore', 'keys')
}

/** How commands open a store: with the keys of this user, or those that `--keys` names. */
export const storeOptions = (io: Io, keys?: string): Pick<StoreOptions, 'keys' | 'toolVersion'> => {
  const folder = keys ?? (io.env === undefined ? undefined : keyFolderOf(io.env))
  return { toolVersion: toolVersion(), ...(folder === undefined ? {} : { keys: folder }) }
}

/** What a person should know of the key when a store was opened: a new one to stdout, trouble to stderr. */
export async function tellSigning(io: Io, { key, fingerprint, madeIn, trouble }: Signing): Promise<void> {
  if (trouble !== null) io.err(`${trouble}\n`)
  if (madeIn !== null)
    await io.out(
      `A new key signs what is recorded here. It lies in ${madeIn}; keep a copy apart from the data.\n  public key   ${key}\n  fingerprint  ${fingerprint}\n`,
    )
}
