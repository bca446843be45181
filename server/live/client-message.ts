import type { ClientMessage } from '../wire/socket.ts'

const topics: readonly string[] = ['state', 'steps', 'readings', 'alarms', 'acts']

/** A message of a page, or what is wrong with it in words. */
export function readClientMessage(text: string): ClientMessage | { readonly fault: string } {
  let message: Record<string, unknown>
  try {
    message = (JSON.parse(text) ?? {}) as Record<string, unknown>
  } catch {
    return { fault: 'found no JSON, expected a message' }
  }
  const { type, run, topics: asked, sinceMs } = message
  if (type !== 'subscribe' && type !== 'unsubscribe')
    return { fault: `found the message '${String(type).slice(0, 40)}', expected subscribe or unsubscribe` }
  if (typeof run !== 'number' || !Number.isSafeInteger(run)) return { fault: 'found no run, expected its number' }
  if (type === 'unsubscribe') return { type, run }
  if (!Array.isArray(asked) || !asked.every((t) => topics.includes(t)))
    return { fault: `found other topics, expected some of ${topics.join(', ')}` }
  if (sinceMs !== null && (typeof sinceMs !== 'number' || !Number.isFinite(sinceMs)))
    return { fault: 'found no sinceMs, expected a time in ms or null' }
  return { type, run, topics: asked, sinceMs }
}
