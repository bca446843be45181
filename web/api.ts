import type { Problem } from '../server/wire/index.ts'

/** What the server answered instead of what was asked, or that it did not answer at all (status 0). */
export class Refusal extends Error {
  override readonly name = 'Refusal'
  readonly status: number
  readonly hint: string | null
  constructor(status: number, message: string, hint: string | null) {
    super(message)
    this.status = status
    this.hint = hint
  }
}

/** A refusal in one sentence with what to do next. */
export const said = (error: unknown): string =>
  error instanceof Refusal
    ? `${error.message}${error.hint === null ? '' : `: ${error.hint}`}`
    : error instanceof Error
      ? error.message
      : String(error)

async function call<T>(path: string, init: RequestInit): Promise<T> {
  let reply: Response
  try {
    reply = await fetch(path, init)
  } catch (error) {
    if (error instanceof DOMException && error.name === 'AbortError') throw error
    throw new Refusal(0, 'the server does not answer', null)
  }
  const body: unknown = (reply.headers.get('content-type') ?? '').includes('json') ? await reply.json() : null
  if (reply.ok) return body as T
  const problem = body as Partial<Problem> | null
  const place = problem?.place?.line == null ? '' : ` (${problem.place.file}, line ${problem.place.line})`
  throw new Refusal(reply.status, `${problem?.message ?? `the server refused (${reply.status})`}${place}`, problem?.hint ?? null)
}

export const getJson = <T>(path: string, signal?: AbortSignal): Promise<T> => call<T>(path, signal === undefined ? {} : { signal })
export const postJson = <T>(path: string, body: unknown): Promise<T> =>
  call<T>(
    path,
    body === undefined
      ? { method: 'POST' }
      : { method: 'POST', headers: { 'content-type': 'application/json' }, body: JSON.stringify(body) },
  )
export const deleteJson = <T>(path: string): Promise<T> => call<T>(path, { method: 'DELETE' })
export const putFile = <T>(path: string, file: File): Promise<T> =>
  call<T>(path, { method: 'PUT', headers: { 'content-type': 'application/octet-stream' }, body: file })
