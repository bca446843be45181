import { type FileHandle, open, readdir, stat } from 'node:fs/promises'
import { basename, dirname, join } from 'node:path'

/** Bytes before the point of reading that are kept to know the file again. */
const tailBytes = 64
const chunkBytes = 1 << 18

/** Where reading of a file stands: what is needed to find the same bytes again after a restart. */
export interface FilePoint {
  readonly ino: number
  readonly offset: number
  /** The bytes just before `offset`, base64. */
  readonly tail: string
}

export interface Piece {
  readonly bytes: Uint8Array
  /** More waits in the file. */
  readonly more: boolean
}

/** What became of the file since the last look. rotated: another file stands at the path, this one is read to its end. truncated: begun anew. */
export type Look = 'same' | 'rotated' | 'truncated' | 'gone'

/** A log opened for following: bytes after a point, and whether it is still the file it was. */
export async function openFollowed(path: string): Promise<FollowedFile | null> {
  try {
    const handle = await open(path, 'r')
    return followed(path, handle, (await handle.stat()).ino)
  } catch (error) {
    if ((error as NodeJS.ErrnoException).code === 'ENOENT') return null
    throw error
  }
}

/**
 * The file that was read up to `point`, wherever it is now: at the path still, or beside it under another name after a rotation. Null
 * where it is nowhere, was truncated or written anew.
 */
export async function findAgain(path: string, point: FilePoint): Promise<FollowedFile | null> {
  const folder = dirname(path)
  const names = await readdir(folder).catch(() => [] as string[])
  for (const name of [basename(path), ...names]) {
    const place = join(folder, name)
    const found = await stat(place).catch(() => null)
    if (found === null || !found.isFile() || found.ino !== point.ino) continue
    const file = await openFollowed(place)
    if (file !== null && (await file.holds(point))) return file
    await file?.close()
  }
  return null
}

function followed(path: string, handle: FileHandle, ino: number) {
  const buffer = Buffer.alloc(chunkBytes)
  let tail: Buffer = Buffer.alloc(0)
  const readAt = async (into: Buffer, from: number): Promise<number> => {
    let length = 0
    for (let got = 1; got > 0 && length < into.length; length += got)
      got = (await handle.read(into, length, into.length - length, from + length)).bytesRead
    return length
  }
  return {
    path,
    ino,
    /** Whether the bytes before a point are still those that were read. */
    async holds({ offset, tail: known }: FilePoint): Promise<boolean> {
      const wanted = Buffer.from(known, 'base64')
      if ((await handle.stat()).size < offset) return false
      const found = Buffer.alloc(wanted.length)
      return (await readAt(found, offset - wanted.length)) === wanted.length && found.equals(wanted)
    },
    /** The next bytes from `offset`; the buffer is used again. */
    async read(offset: number): Promise<Piece> {
      const length = await readAt(buffer, offset)
      return { bytes: buffer.subarray(0, length), more: length === chunkBytes }
    },
    async point(offset: number): Promise<FilePoint> {
      const length = Math.min(offset, tailBytes)
      tail = Buffer.alloc(length)
      const got = await readAt(tail, offset - length)
      return { ino, offset, tail: tail.subarray(0, got).toString('base64') }
    },
    /** What stands at `main`, the path that is followed, compared with this file. */
    async look(main: string, point: FilePoint): Promise<Look> {
      const there = await stat(main).catch(() => null)
      if (there === null) return 'gone'
      if (there.ino !== ino) return 'rotated'
      return (await this.holds(point)) ? 'same' : 'truncated'
    },
    close: () => handle.close(),
  }
}
export type FollowedFile = ReturnType<typeof followed>
