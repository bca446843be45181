import type { FlushPlan } from '../../server/core/report.ts'
import type { Course } from '../../server/wire/index.ts'
import type { ZoneClock } from '../model/clock.ts'
import { pointValue } from '../model/flush-now.ts'
import { fixed } from '../model/format.ts'
import { el, fill } from './dom.ts'

const verdicts = { open: 'not scored yet', restored: 'restored', 'not-fully-restored': 'not fully restored' } as const

/** What is on record of the flush so far: steps with their checks, what came of it, what was out of the ordinary, what the line held. */
export function flushStory(clock: ZoneClock) {
  const node = el('div', { class: 'two' })
  let key = ''
  return {
    node,
    show(c: Course, plan: FlushPlan | null, step: string): void {
      const k = JSON.stringify([
        c.flush,
        c.steps.map((s) => [s.state, s.endedMs]),
        c.recovery,
        c.calls,
        c.exceptions,
        c.refusals.length,
        step,
        plan !== null,
      ])
      if (k === key) return
      key = k
      const advised = plan?.steps.find((x) => x.id === step)
      const done = c.steps.filter((s) => s.endedMs !== null)
      const table = el(
        'table',
        { class: 'done' },
        el(
          'tbody',
          {},
          ...done.map((s) =>
            el(
              'tr',
              {},
              el('th', { scope: 'row', text: s.step }),
              el('td', {
                text:
                  s.state === 'accepted'
                    ? s.points
                        .filter((p) => p.criterion === 'volume' || p.person !== null || p.unit === '× clean')
                        .map((p) => `${p.part ?? p.criterion}: ${pointValue(p)}`)
                        .join('; ') || `all ${s.points.length} points met by readings`
                    : `${s.state}${s.reason === null ? '' : `: ${s.reason}`}`,
              }),
              el('td', { class: 'nowrap soft', text: `${clock.hms(s.endedMs!)} ${s.endedBy ?? ''}` }),
            ),
          ),
        ),
      )
      const recovery = el(
        'table',
        { class: 'recovery' },
        el(
          'thead',
          {},
          el(
            'tr',
            {},
            ...['Segment', 'Before', 'In water', 'In solvent', 'On feeds', 'Verdict'].map((t, i) =>
              el('th', { scope: 'col', class: i > 0 && i < 5 ? 'num' : '', text: t }),
            ),
          ),
        ),
        el(
          'tbody',
          {},
          ...c.recovery.map((r) =>
            el(
              'tr',
              { 'data-verdict': r.verdict },
              el('th', { scope: 'row', text: r.segment }),
              ...[r.before, r.water, r.solvent, r.feeds].map((v) => el('td', { class: 'num', text: fixed(v, 2) ?? '–' })),
              el('td', { text: `${verdicts[r.verdict]}${r.baseline === null ? '' : `; next baseline ${fixed(r.baseline, 2)}`}` }),
            ),
          ),
        ),
      )
      const odd = [
        ...c.calls.map((x) => ({ tMs: x.tMs, text: x.text })),
        ...c.exceptions.map((x) => ({ tMs: x.tMs, text: `${x.step} ${x.text} (${x.person})` })),
      ]
      fill(
        node,
        advised === undefined || c.state !== 'running' ? null : section(`Advised for ${step} by the plan`, advisedList(advised)),
        section('On record so far', done.length === 0 ? el('p', { class: 'soft', text: 'No step is accepted yet.' }) : table),
        section('Ratio against clean, each liquid by its own reference [× clean]', recovery),
        odd.length === 0
          ? null
          : section('Out of the ordinary', el('ul', {}, ...odd.map((x) => el('li', { text: `${clock.hms(x.tMs)} ${x.text}` })))),
        plan === null || plan.inventory.length === 0
          ? null
          : section(
              'The line before F0, as if nothing had reacted',
              el(
                'table',
                {},
                el(
                  'tbody',
                  {},
                  ...plan.inventory
                    .filter((i) => i.reagents.length > 0)
                    .map((i) =>
                      el(
                        'tr',
                        {},
                        el('th', { scope: 'row', text: `${i.segment}, ${fixed(i.volumeMl, 0) ?? '?'} mL` }),
                        el('td', { text: i.reagents.map((r) => `${fixed(r.mol, 3) ?? 'not known'} mol ${r.name}`).join(', ') }),
                        el('td', {
                          class: 'num',
                          text:
                            i.hydrolysisKJ === null || i.hydrolysisKJ === 0 ? '' : `${fixed(i.hydrolysisKJ, 1)} kJ if it met water`,
                        }),
                      ),
                    ),
                ),
              ),
            ),
      )
    },
  }
}

/** Hold points, what ends the step and what can hurt, as the plan words them. */
const advisedList = (s: FlushPlan['steps'][number]): HTMLElement =>
  el(
    'ul',
    { class: 'advised' },
    ...s.holdPoints.map((text) => el('li', { text: text.replace(/^Before this step: /, 'Before it: ') })),
    ...s.hazards.map((text) => el('li', { class: 'strong', text })),
  )

const section = (title: string, body: HTMLElement): HTMLElement =>
  el('section', {}, el('div', { class: 'head' }, el('h2', { text: title })), body)
