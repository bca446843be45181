import { open } from 'node:fs/promises'
import { MonitorError } from '../core/errors.ts'
import type { Skid } from '../core/skid.ts'
import { loadSkid } from './check.ts'
import { maxBytes } from './document.ts'

const why: Readonly<Record<string, string>> = {
  ENOENT: 'there is no such file',
  EISDIR: 'is a folder',
  EACCES: 'may not be read',
  ENOTDIR: 'there is no such file',
}

/** Text of a skid file: UTF-8, or UTF-16 with its mark. At most a little more than a skid file may hold is read. Errors: FILE_READ. */
export async function readSkidText(path: string): Promise<string> {
  const bytes = Buffer.alloc(maxBytes + 1)
  let length = 0
  try {
    const handle = await open(path, 'r')
    try {
      for (let got = 1; got > 0 && length < bytes.length; length += got)
        got = (await handle.read(bytes, length, bytes.length - length)).bytesRead
    } finally {
      await handle.close()
    }
  } catch (cause) {
    const code = (cause as NodeJS.ErrnoException).code ?? ''
    throw new MonitorError('FILE_READ', `the skid file cannot be read: ${why[code] ?? code}`, {
      hint: 'give the path of a skid file, YAML or JSON',
      place: { file: path },
      cause,
    })
  }
  const text = bytes.subarray(0, length)
  if (text[0] === 0xff && text[1] === 0xfe) return new TextDecoder('utf-16le').decode(text)
  if (text[0] === 0xfe && text[1] === 0xff) return new TextDecoder('utf-16be').decode(text)
  return new TextDecoder('utf-8').decode(text)
}

/** The skid of a file. Errors: FILE_READ, SKID_FILE. */
export const loadSkidFile = async (path: string): Promise<Skid> => loadSkid(await readSkidText(path), path)
