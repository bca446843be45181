import { createReadStream } from 'node:fs'
import { analyseLog } from '../../server/analyse.ts'
import type { Report } from '../../server/core/report.ts'
import type { Skid } from '../../server/core/skid.ts'

/** When a log with elapsed seconds is said to have begun. */
export const startMs = Date.UTC(2031, 0, 6)
export const secondsOf = (iso: string): number => (Date.parse(iso) - startMs) / 1000

/** A log through the very pipeline that runs live. */
export async function reportOf(skid: Skid, log: { readonly file: string } | { readonly text: string }): Promise<Report> {
  const chunks =
    'file' in log
      ? (createReadStream(log.file) as AsyncIterable<Uint8Array>)
      : (async function* () { yield new TextEncoder().encode(log.text) })() // biome-ignore format: one line
  const { report } = await analyseLog({ skid, sources: [{ name: 'run.csv', chunks }], startMs })
  return report
}
