import { MonitorError } from './core/errors.ts'

const codeOf = (cause: unknown): string =>
  (cause as NodeJS.ErrnoException).code ?? (cause instanceof Error ? cause.message : String(cause))

const reading: Readonly<Record<string, readonly [what: string, mend: string]>> = {
  ENOENT: ['there is no such file', 'check the path'],
  ENOTDIR: ['there is no such file', 'check the path'],
  EISDIR: ['it is a folder', 'give a file'],
  EACCES: ['it may not be read', 'ask for the right to read it'],
}
const writing: Readonly<Record<string, readonly [what: string, mend: string]>> = {
  ENOENT: ['its folder is not there', 'make the folder, or give another path'],
  ENOTDIR: ['its folder is a file', 'give another path'],
  EISDIR: ['a folder of that name is there', 'give another path'],
  EACCES: ['its folder may not be written to', 'give another path, or ask for the right to write there'],
  EPERM: ['its folder may not be written to', 'give another path, or ask for the right to write there'],
  EROFS: ['its disk is read-only', 'give a path on another disk'],
  ENOSPC: ['the disk is full', 'free some space, or give a path on another disk'],
}

/** What kept a file from being read, as FILE_READ with the path and the mend. */
export function cannotRead(file: string, cause: unknown): MonitorError {
  const [what, hint] = reading[codeOf(cause)] ?? [codeOf(cause), 'check the file']
  return new MonitorError('FILE_READ', `cannot read: ${what}`, { place: { file }, hint, cause })
}

/** What kept a file from being written, as DISK_FULL or FILE_WRITE with the path and the mend. */
export function cannotWrite(file: string, cause: unknown): MonitorError {
  const code = codeOf(cause)
  const [what, hint] = writing[code] ?? [code, 'check the disk, or give another path']
  return new MonitorError(code === 'ENOSPC' ? 'DISK_FULL' : 'FILE_WRITE', `cannot write: ${what}`, { place: { file }, hint, cause })
}
