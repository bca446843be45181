import { open } from 'node:fs/promises'
import { createCollector } from '../core/pipeline/collect.ts'
import { createPipeline } from '../core/pipeline/pipeline.ts'
import type { Report } from '../core/report.ts'
import type { Skid } from '../core/skid.ts'
import { type RecordHead, readRecord } from './record-json.ts'

/** Whether a file is the record of a run, by how it begins. A file that cannot be read is none: what reads it next says so. */
export async function isRecord(file: string): Promise<boolean> {
  if (file === '-') return false
  const begin = '{"record":'
  try {
    const handle = await open(file, 'r')
    try {
      const { buffer, bytesRead } = await handle.read(Buffer.alloc(begin.length), 0, begin.length)
      return buffer.toString('utf8', 0, bytesRead) === begin
    } finally {
      await handle.close()
    }
  } catch {
    return false
  }
}

/** The report of an exported record, through the very pipeline that ran live. `skidOf` reads the skid file that the record carries. */
export async function analyseRecord(
  file: string,
  skidOf: (text: string, name: string) => Skid,
): Promise<{ head: RecordHead; skid: Skid; report: Report }> {
  const { head, entries } = await readRecord(file)
  const skid = skidOf(head.skidFile.text, head.skidFile.name)
  const pipeline = createPipeline(skid)
  const collector = createCollector(skid)
  for await (const entry of entries) collector.take(pipeline.push(entry))
  collector.take(pipeline.finish())
  return { head, skid, report: collector.report(pipeline) }
}
