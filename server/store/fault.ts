import { MonitorError } from '../core/errors.ts'

/** SQLite's and the system's errors as the tool's own: one line and what to do. Errors of ours pass through. */
export function asStoreError(error: unknown, place: string): unknown {
  if (error instanceof MonitorError || !(error instanceof Error)) return error
  const code = 'code' in error && typeof error.code === 'string' ? error.code : ''
  const more = (hint: string) => ({ hint, cause: error })
  if (code === 'SQLITE_FULL' || code === 'ENOSPC' || code === 'EDQUOT' || code === 'SQLITE_IOERR_SHMSIZE')
    return new MonitorError(
      'DISK_FULL',
      `no room left to write ${place}`,
      more('free some space; what was acknowledged is safe on disk'),
    )
  if (code.startsWith('SQLITE_CORRUPT') || code === 'SQLITE_NOTADB' || error instanceof SyntaxError)
    return new MonitorError('STORE_CORRUPT', `${place} is damaged: ${error.message}`, more('restore the data folder from a backup'))
  if (code.startsWith('SQLITE_BUSY') || code === 'SQLITE_LOCKED')
    return new MonitorError(
      'STORE_LOCKED',
      `${place} is in use by another process`,
      more('stop that one, or choose another --data folder'),
    )
  if (
    code.startsWith('SQLITE_READONLY') ||
    code === 'SQLITE_CANTOPEN' ||
    code === 'SQLITE_PERM' ||
    /^(EACCES|EPERM|EROFS|ENOTDIR|EEXIST)$/.test(code)
  )
    return new MonitorError(
      'STORE_OPEN',
      `cannot open ${place} for writing: ${error.message}`,
      more('check the folder and its permissions, or choose another with --data'),
    )
  if (code.startsWith('SQLITE_IOERR'))
    return new MonitorError(
      'STORE_OPEN',
      `the disk failed on ${place}: ${error.message} (${code})`,
      more('check the disk and its free space'),
    )
  return error
}

/** A function whose errors are the tool's own. */
export function guarded<A extends unknown[], R>(place: string, act: (...args: A) => R): (...args: A) => R {
  return (...args) => {
    try {
      return act(...args)
    } catch (error) {
      throw asStoreError(error, place)
    }
  }
}

/** The same functions, each guarded; their types and comments stay. */
export function guardedAll<T extends { readonly [name: string]: unknown }>(place: string, functions: T): T {
  const wrap = ([name, act]: [string, unknown]) => [name, guarded(place, act as (...args: unknown[]) => unknown)]
  return Object.fromEntries(Object.entries(functions).map(wrap)) as T
}
