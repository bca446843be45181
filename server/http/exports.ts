import { Readable } from 'node:stream'
import type { FastifyPluginAsyncTypebox } from '@fastify/type-provider-typebox'
import { Type } from 'typebox'
import type { ExportKind } from '../export-run.ts'
import { problemSchema } from './schemas.ts'
import type { Services } from './services.ts'

const files = ['alarms.csv', 'alarms.json', 'samples.csv', 'events.csv', 'record.json'] as const
/** What a date can be. */
const time = Type.Number({ minimum: -8.64e15, maximum: 8.64e15 })
const textOrAll = Type.Optional(Type.String({ maxLength: 100 }))

/** Downloads of a run: alarm history, readings, record. */
export const exportRoutes: FastifyPluginAsyncTypebox<Services> = async (app, s) => {
  for (const file of files) {
    const [what, format] = file.split('.') as [ExportKind, 'csv' | 'json']
    const querystring = Type.Object(
      what === 'alarms'
        ? {
            fromMs: Type.Optional(time),
            toMs: Type.Optional(time),
            kind: textOrAll,
            segment: textOrAll,
            priority: textOrAll,
          }
        : {},
      { additionalProperties: false },
    )
    app.get(
      `/runs/:run/export/${file}`,
      {
        config: { needs: 'read' },
        schema: {
          summary: `${what} of a run as ${format}, a download`,
          params: Type.Object({ run: Type.Integer({ minimum: 1 }) }),
          querystring,
          produces: [format === 'csv' ? 'text/csv' : 'application/json'],
          response: { 200: Type.Unsafe<unknown>({ type: 'string' }), '4xx': Type.Unsafe<unknown>(problemSchema) },
        },
      },
      async ({ params: { run }, query }, reply) => {
        const q = query as { fromMs?: number; toMs?: number; kind?: string; segment?: string; priority?: string }
        const out = s.exportRun({
          parts: s.catalogue.parts(run),
          row: s.catalogue.row(run),
          live: s.monitor.engine(run),
          what,
          format,
          filter: {
            fromMs: q.fromMs ?? null,
            toMs: q.toMs ?? null,
            kind: q.kind ?? null,
            segment: q.segment ?? null,
            priority: q.priority ?? null,
          },
          toolVersion: s.toolVersion,
          nowMs: s.wallMs(),
        })
        return reply
          .header('content-disposition', `attachment; filename="${out.name}"`)
          .header('cache-control', 'no-store')
          .type(out.contentType)
          .send(Readable.from(oneByOne(out.pieces)))
      },
    )
  }
}

/** Pieces with room for other work between them: a big download keeps no scan waiting. */
async function* oneByOne(pieces: Iterable<string>): AsyncGenerator<string> {
  for (const piece of pieces) {
    yield piece
    await new Promise((done) => setImmediate(done))
  }
}
