import type { FlushPlan, FlushStep } from '../report.ts'
import type { NextStep } from './course.ts'

const wrap = (text: string, indent: string, width = 110): string => {
  const lines: string[] = []
  let line = ''
  for (const word of text.split(' ')) {
    if (line !== '' && indent.length + line.length + 1 + word.length > width) {
      lines.push(line)
      line = word
    } else line = line === '' ? word : `${line} ${word}`
  }
  return [...lines, line].join(`\n${indent}`)
}
const bullet = (text: string, mark = '-', indent = '     '): string => `${indent}${mark} ${wrap(text, `${indent}  `)}\n`
const block = (title: string, items: readonly string[]): string =>
  items.length === 0 ? '' : `   ${title}\n${items.map((i) => bullet(i)).join('')}`
const list = (title: string, items: readonly string[]): string =>
  items.length === 0 ? '' : `\n${title}\n${items.map((i) => bullet(i, '-', '  ')).join('')}`
const figure = (value: number | null, unit: string, digits = 0): string =>
  `${value === null ? 'not computed' : value.toFixed(digits)} ${value === null ? '' : unit}`.trim()

function stepText(s: FlushStep): string {
  const figures =
    s.id === 'F0'
      ? figure(s.minutes, 'min', 1)
      : [figure(s.flowMlMin, 'mL/min'), figure(s.volumeMl, 'mL'), figure(s.minutes, 'min', 1)].join(', ')
  return `\n${s.id}  ${s.title}${s.liquid === null ? '' : ` [${s.liquid}]`}\n   ${figures}\n${block('hold points', s.holdPoints)}${block('ends when', s.endsWhen)}${block('hazards', s.hazards)}${block('computed from', s.basis)}`
}

const kj = (value: number | null): string => (value === null ? 'not computed' : `${value.toFixed(1)} kJ`)

/** A flush plan as a page for a terminal or a printer, plain text. */
export function planText(plan: FlushPlan): string {
  const inventory = plan.inventory.map((i) => {
    const reagents = i.reagents
      .map((r) => `${r.name} ${r.mol === null ? 'not computed' : `${r.mol.toPrecision(3)} mol`}`)
      .join(', ')
    return `${i.segment}: ${figure(i.volumeMl, 'mL', 1)}${reagents === '' ? '' : `; ${reagents}; ${kj(i.hydrolysisKJ)} if its organolithium met water`}${i.reactionKJ === null ? '' : `, ${kj(i.reactionKJ)} if its reaction ran on`}`
  })
  const reference = plan.waterReference.map(
    (r) =>
      `${r.segment}: clean ${r.cleanDpBar.toFixed(2)} bar, predicted ${r.predictedDpBar.toFixed(2)} bar at ratio ${r.ratio.toFixed(2)}, ${r.flowMlMin.toFixed(0)} mL/min, ${r.tempC.toFixed(0)} °C${r.dpHighBar === null ? '' : `, high limit ${r.dpHighBar} bar`}`,
  )
  return [
    `Flush plan for ${plan.segments.join(', ')} (path: ${plan.path.join(', ')}): ${plan.totalMinutes === null ? 'time not computed' : `about ${plan.totalMinutes.toFixed(0)} min in all`}\n`,
    list('Cautions', plan.cautions),
    list(
      'Not advised as things stand',
      plan.refused.map((r) => `${r.step}: ${r.reason}`),
    ),
    list('Not computed', plan.missing),
    list('Inventory before F0', inventory),
    ...plan.steps.map(stepText),
    list('Water reference for F3', reference),
    list('Assumed', plan.assumptions),
  ].join('')
}

/** What may come next by the checks stored so far, what stands open in it, and what is refused. */
export function nextText(next: NextStep): string {
  return [
    `\nNext by the checks stored: ${next.done ? 'every step is accepted' : (next.step?.id ?? 'nothing; see what is refused')}\n`,
    ...next.waitingFor.map((p) => bullet(`${p.step} ${p.criterion}: ${p.text} (${p.why})`, '-', '  ')),
    list(
      'Refused',
      next.refused.map((r) => `${r.step}: ${r.reason}`),
    ),
    list(
      'Failed, skipped or doubtful checks',
      next.exceptions.map(
        (e) => `${e.step} ${e.criterion}: ${e.verdict}, ${e.quality}${e.reason === null ? '' : `, ${e.reason}`} (${e.person})`,
      ),
    ),
  ].join('')
}
