import { randomUUID } from 'node:crypto'
import { createWriteStream } from 'node:fs'
import { mkdir, mkdtemp, rm, writeFile } from 'node:fs/promises'
import { tmpdir } from 'node:os'
import { join } from 'node:path'
import type { Readable } from 'node:stream'
import { pipeline } from 'node:stream/promises'
import type { FastifyPluginAsyncTypebox } from '@fastify/type-provider-typebox'
import { Type } from 'typebox'
import { MonitorError } from '../core/errors.ts'
import type { Upload, UploadBody } from '../wire/upload.ts'
import { type Caller, signedIn } from './access.ts'
import { replies, runRowSchema, uploadBodySchema, uploadSchema } from './schemas.ts'
import type { Services } from './services.ts'

interface Pending {
  readonly person: string
  readonly dir: string
  readonly body: UploadBody
  readonly skidFile: string
  readonly skidText: string
  readonly logs: { name: string; path: string; bytes: number }[]
  readonly bornMs: number
}

const config = { needs: 'operate' } as const
const mostPending = 8
const mostLogs = 32
/** An upload nobody finished is thrown away after so long. */
const keptMs = 3_600_000

/** Logs from a page: begun with the skid file, the logs streamed to disk one by one, then imported as a run of their own. */
export const uploadRoutes: FastifyPluginAsyncTypebox<Services> = async (app, s) => {
  const pending = new Map<string, Pending>()
  const root = await mkdtemp(join(tmpdir(), 'clearbore-uploads-'))
  app.addHook('onClose', async () => rm(root, { recursive: true, force: true }))
  app.addContentTypeParser(['application/octet-stream', 'text/csv'], (_request, payload, done) => done(null, payload))

  const view = (upload: string, p: Pending): Upload => ({ upload, logs: p.logs.map(({ name, bytes }) => ({ name, bytes })) })
  /** An upload is the person's who began it. */
  const need = (upload: string, caller: Caller | null): Pending => {
    const found = pending.get(upload)
    if (found === undefined || found.person !== caller?.name)
      throw new MonitorError('UPLOAD', 'there is no such upload', { hint: 'begin it again' })
    return found
  }
  const drop = (upload: string): void => {
    const p = pending.get(upload)
    pending.delete(upload)
    if (p !== undefined) void rm(p.dir, { recursive: true, force: true })
  }

  app.post(
    '/uploads',
    {
      config,
      schema: { summary: 'begin an upload: skid file and events', body: uploadBodySchema, response: replies(uploadSchema) },
    },
    async ({ body, person }) => {
      for (const [id, p] of pending) if (s.wallMs() - p.bornMs > keptMs) drop(id)
      if (pending.size >= mostPending)
        throw new MonitorError('UPLOAD', `${mostPending} uploads are under way already`, { hint: 'finish one of them or wait' })
      const { skid } = body
      const stored = 'ofRun' in skid ? s.store.runs.get(s.catalogue.parts(skid.ofRun).run) : null
      const skidText = stored?.skidText ?? ('text' in skid ? skid.text : '')
      const skidFile = stored?.skidFile ?? ('name' in skid ? skid.name : '')
      s.skidOf(skidText, skidFile)
      const id = randomUUID()
      const dir = join(root, id)
      await mkdir(dir)
      const made: Pending = { person: signedIn(person).name, dir, body, skidFile, skidText, logs: [], bornMs: s.wallMs() }
      pending.set(id, made)
      return view(id, made)
    },
  )

  app.put(
    '/uploads/:upload/logs/:name',
    {
      config,
      bodyLimit: s.uploadMaxBytes,
      schema: {
        summary: 'one log file, its bytes as the body (application/octet-stream or text/csv)',
        consumes: ['application/octet-stream', 'text/csv'],
        params: Type.Object({ upload: Type.String({ maxLength: 36 }), name: Type.String({ minLength: 1, maxLength: 200 }) }),
        response: replies(uploadSchema),
      },
    },
    async ({ params: { upload, name }, body, headers, person }, reply) => {
      const p = need(upload, person)
      if (p.logs.length >= mostLogs) throw new MonitorError('UPLOAD', `at most ${mostLogs} logs make one run`)
      if (p.logs.some((l) => l.name === name)) throw new MonitorError('UPLOAD', `'${name}' was uploaded already`)
      if (Number(headers['content-length'] ?? 0) > s.uploadMaxBytes) return reply.code(413).send(tooLarge(s.uploadMaxBytes))
      const path = join(p.dir, `${p.logs.length}`)
      let bytes = 0
      const count = async function* (source: AsyncIterable<Uint8Array>) {
        for await (const chunk of source) {
          bytes += chunk.length
          // The rest is read and dropped: a connection cut in the middle would lose the reply.
          if (bytes <= s.uploadMaxBytes) yield chunk
        }
      }
      if (body === undefined || body === null) await writeFile(path, '')
      else await pipeline(body as Readable, count, createWriteStream(path))
      if (bytes > s.uploadMaxBytes) {
        await rm(path, { force: true })
        return reply.code(413).send(tooLarge(s.uploadMaxBytes))
      }
      p.logs.push({ name, path, bytes })
      return view(upload, p)
    },
  )

  app.post(
    '/uploads/:upload/import',
    {
      config,
      schema: {
        summary: 'the uploaded logs become a run',
        params: Type.Object({ upload: Type.String({ maxLength: 36 }) }),
        response: replies(runRowSchema),
      },
    },
    async ({ params: { upload }, person }) => {
      const p = need(upload, person)
      if (p.logs.length === 0) throw new MonitorError('UPLOAD', 'no log has been uploaded yet', { hint: 'send at least one' })
      const { title, events, start } = p.body
      const { skidFile, skidText, logs } = p
      pending.delete(upload)
      try {
        return s.importLogs({
          title,
          person: p.person,
          skidFile,
          skidText,
          logs,
          events,
          start,
          done: () => void rm(p.dir, { recursive: true, force: true }),
        })
      } catch (error) {
        await rm(p.dir, { recursive: true, force: true })
        throw error
      }
    },
  )
}

const tooLarge = (most: number) => ({
  code: 'HTTP_413',
  message: `the file is larger than the ${Math.round(most / 2 ** 20)} MiB that this server takes`,
  hint: 'import it on the command line: clearbore import',
  place: null,
})
