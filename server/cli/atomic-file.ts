import { once } from 'node:events'
import { createWriteStream } from 'node:fs'
import { rename, rm } from 'node:fs/promises'
import { cannotWrite } from '../file-trouble.ts'

export interface AtomicFile {
  /** Resolves once more may follow. */
  write(text: string): Promise<void>
  /** Puts the file in place; what stood there before is replaced in one step. */
  commit(): Promise<void>
  /** Leaves nothing behind. */
  discard(): Promise<void>
}

/**
 * Opens a file that appears whole or not at all: written beside its place under another name, then renamed.
 * Errors: FILE_WRITE, or DISK_FULL, naming the file.
 */
export async function openAtomic(path: string): Promise<AtomicFile> {
  const temporary = `${path}.${process.pid}.part`
  const stream = createWriteStream(temporary, { encoding: 'utf8', highWaterMark: 1 << 18, flush: true })
  let failure: NodeJS.ErrnoException | null = null
  stream.on('error', (error) => {
    failure ??= error
  })
  const check = () => {
    if (failure === null) return
    throw cannotWrite(path, failure)
  }
  const discard = async () => {
    stream.destroy()
    if (!stream.closed) await once(stream, 'close').catch(() => undefined)
    await rm(temporary, { force: true })
  }
  await once(stream, 'open').catch(check)
  return {
    async write(text) {
      check()
      // The callback also comes when the write fails; the error is then in `failure`.
      await new Promise<void>((done) => stream.write(text, () => done()))
      check()
    },
    async commit() {
      stream.end()
      if (!stream.closed) await once(stream, 'close').catch(() => undefined)
      if (failure !== null) await discard()
      check()
      try {
        await rename(temporary, path)
      } catch (cause) {
        await rm(temporary, { force: true })
        throw cannotWrite(path, cause)
      }
    },
    discard,
  }
}

/** Writes a whole text so that the file appears whole or not at all. */
export async function writeAtomic(path: string, text: string): Promise<void> {
  const file = await openAtomic(path)
  try {
    await file.write(text)
  } catch (error) {
    await file.discard()
    throw error
  }
  await file.commit()
}
