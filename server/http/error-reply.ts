import type { FastifyError, FastifyInstance } from 'fastify'
import { type ErrorCode, MonitorError } from '../core/errors.ts'
import type { Problem } from '../wire/service.ts'

/** Statuses of the tool's own errors; what is not here is a failure of the machine, 500. */
const statuses: Partial<Record<ErrorCode, number>> = {
  USAGE: 400,
  ACT_REFUSED: 400,
  CONFIG_RANGE: 400,
  FLUSH_REFUSED: 422,
  TAG_UNKNOWN: 404,
  RUN_UNKNOWN: 404,
  ALARM_UNKNOWN: 404,
  RUN_ENDED: 409,
  TRAIL_REVIEW: 409,
  SETTINGS_UNKNOWN: 404,
  UPLOAD: 400,
  SKID_FILE: 422,
  EVENTS_FILE: 422,
  CSV_EMPTY: 422,
  CSV_BINARY: 422,
  CSV_HEADER: 422,
  CSV_DELIMITER: 422,
  CSV_TIME: 422,
  CSV_LINE: 422,
  DISK_FULL: 507,
  STORE_LOCKED: 503,
  SIGN_IN_NEEDED: 401,
  SIGN_IN_REFUSED: 401,
  SIGN_IN_WAIT: 429,
  NOT_ALLOWED: 403,
  PERSON_REFUSED: 422,
  PERSON_UNKNOWN: 404,
  LINK_SPENT: 410,
  BUSY: 503,
  TOO_MANY: 429,
}

export const problemOf = (e: MonitorError): Problem => ({
  code: e.code,
  message: e.message,
  hint: e.hint,
  place: e.place === null ? null : { file: e.place.file, line: e.place.line ?? null, column: e.place.column ?? null },
})

const plain = (status: number, message: string, hint: string | null = null): Problem => ({
  code: `HTTP_${status}`,
  message,
  hint,
  place: null,
})

/** Every error as a Problem, never a stack trace; what is our own fault goes to `log` and leaves as one sentence. */
export function problemReplies(app: FastifyInstance, log: (line: string) => void): void {
  app.setNotFoundHandler((request, reply) =>
    reply.code(404).send(plain(404, `there is nothing at ${request.method} ${request.url.slice(0, 200)}`)),
  )
  app.setErrorHandler((error: FastifyError | MonitorError, request, reply) => {
    if (error instanceof MonitorError) {
      const status = statuses[error.code] ?? 500
      if (status >= 500) log(`${request.method} ${request.url}: ${error.line()}`)
      return reply.code(status).send(problemOf(error))
    }
    const status = error.statusCode ?? 500
    if (status >= 400 && status < 500) return reply.code(status).send(plain(status, error.message))
    log(`${request.method} ${request.url}: ${error.stack ?? error.message}`)
    return reply
      .code(500)
      .send(plain(500, 'the server failed at this request; its log says why', 'try again, or look into the log'))
  })
}
