import { spawn } from 'node:child_process'
import { once } from 'node:events'
import { fileURLToPath } from 'node:url'
import type { Report } from '../../server/core/report.ts'
import { benchHeader, benchRows } from './cli.ts'

const entry = fileURLToPath(new URL('../../scripts/clearbore.js', import.meta.url))
const measure = "data:text/javascript,process.on('exit',()=>console.error('peak '+process.resourceUsage().maxRSS))"
const extra = Array.from({ length: 48 }, (_, i) => i)

/** Pipes at least so many bytes of a bench log, 48 columns besides the tags', into `analyse -` of a process with a heap of 128 MB. */
export async function pipeLog(skidFile: string, bytes: number): Promise<{ rows: number; report: Report; peakMB: number }> {
  const args = ['--max-old-space-size=128', '--import', measure, entry, 'analyse', '-', '--skid', skidFile, '--json', '-']
  const child = spawn(process.execPath, args, { stdio: 'pipe' })
  const said = { out: '', err: '' }
  child.stdout.on('data', (d) => {
    said.out += d
  })
  child.stderr.on('data', (d) => {
    said.err += d
  })
  const closed = once(child, 'close')
  const cells = `,${extra.map((i) => (100 + i / 7).toFixed(4)).join(',')}\n`
  let sent = 0
  let rows = 0
  const send = async (text: string): Promise<void> => {
    sent += text.length
    if (!child.stdin.write(text)) await once(child.stdin, 'drain')
  }
  await send(benchHeader.replace('\n', `,${extra.map((i) => `other ${i}`).join(',')}\n`))
  for (; sent < bytes; rows += 1000) await send(benchRows(1000, rows).replaceAll('\n', cells))
  child.stdin.end()
  const [code] = await closed
  if (code !== 0) throw new Error(`analyse ended with ${code}: ${said.err}`)
  return { rows, report: JSON.parse(said.out) as Report, peakMB: Number(/peak (\d+)/.exec(said.err)?.[1]) / 1024 }
}
