import { createAdviser, type SegmentForAdvice } from '../advice/adviser.ts'
import { createBook } from '../alarms/book.ts'
import type { Signal } from '../alarms/occurrence.ts'
import { createSuppression } from '../alarms/suppression.ts'
import { bankSettings } from '../bank/bank-state.ts'
import { layoutOf } from '../derive/layout.ts'
import { createStepper, type Step, stepScans } from '../derive/step.ts'
import { MonitorError } from '../errors.ts'
import { createGuide } from '../flush/guide.ts'
import type { FlushInput } from '../flush/input.ts'
import { planFlush } from '../flush/plan.ts'
import type { BaselinePoint } from '../flush/reference.ts'
import { createWatch } from '../fouling/watch.ts'
import type { WatchEvent } from '../fouling/watch-state.ts'
import { createPresent } from '../insight/present.ts'
import type { RowBlock } from '../reading.ts'
import { createGrid, type Scan } from '../scan/grid.ts'
import type { Act, Entry, LimitName } from '../sequence.ts'
import { createConfiguration, type Took } from '../settings/configuration.ts'
import { filterChanged, unusedWhy, waterResult } from '../settings/hand-events.ts'
import { createExcursions } from '../signals/excursions.ts'
import { createInstruments } from '../signals/instruments.ts'
import { createLimits, type LimitTable, limitsOf } from '../signals/limits.ts'
import { siteRules } from '../signals/site-rules.ts'
import type { Skid } from '../skid.ts'
import { paFromBar } from '../units.ts'
import type { PipelineEvent } from './events.ts'
import { type PipelineOptions, type PipelineState, withLimits } from './pipeline-state.ts'
import { overSignal, stepSaid } from './step-said.ts'
import { creepSaid, type Said, unjudgedText, verdictSaid } from './verdict-said.ts'

const timelineMs = 600_000
const nothing: readonly PipelineEvent[] = []
const belowClean = 'slough-off of what the baseline held, a leak or bypass, or an instrument'

/**
 * source → quality → scan → derive → detect → alarm → advise on one recorded sequence. Pure: what comes out depends on the skid and on
 * the entries pushed, in their order, and on nothing else. How rows are cut into blocks makes no difference.
 * Errors: STATE_VERSION for a state of another version.
 */
export function createPipeline(skid: Skid, saved?: PipelineState, options: PipelineOptions = {}) {
  if (saved !== undefined && saved.version !== 1)
    throw new MonitorError('STATE_VERSION', `state version ${String(saved.version)} is not 1`, {
      hint: 'analyse the record from its start',
    })
  const layout = layoutOf(skid)
  const scanMs = skid.scanSeconds * 1000
  const stepMs = stepScans(skid.scanSeconds) * scanMs
  let events: PipelineEvent[] = []
  let known = options.known

  const configuration = createConfiguration(
    skid,
    saved === undefined ? undefined : (saved.configuration ?? withLimits(skid, saved.limits)),
  )
  const instruments = createInstruments(layout, saved?.instruments)
  const present = createPresent(layout, saved?.present)
  const flushInput = (segments: readonly string[], ratios: Readonly<Record<string, number | null>>): FlushInput => ({
    // The configuration as it stands now, a person may have changed it.
    skid: configuration.skid(),
    segments,
    ratios,
    given: present.forFlush(layout.segments.findIndex((g) => g.spec.id === segments[0])),
  })
  const adviser = createAdviser(saved?.adviser, (segment, ratios) => planFlush(flushInput([segment], ratios)))

  /** The stages that settings reach, by the configuration in force; a change has them go on from their state as after a restart. */
  function stages(of: Partial<Pick<PipelineState, 'book' | 'watch' | 'excursions' | 'suppression'>>) {
    const inForce = configuration.skid()
    const laid = layoutOf(inForce)
    const site = siteRules(inForce)
    const version = configuration.version()
    const book = createBook({ configVersion: `${skid.skid}/${version}`, version, policyOf: site.policyOf }, of.book)
    const limits: LimitTable = limitsOf(laid)
    const sizes = options.bank ?? bankSettings
    const bank =
      inForce.disturbances === undefined ? sizes : { ...sizes, disturbances: { ...sizes.disturbances, ...inForce.disturbances } }
    return {
      layout: laid,
      site,
      book,
      limits,
      watch: createWatch(laid, stepMs, of.watch, { ...options, ...(known === undefined ? {} : { known }), bank }),
      excursions: createExcursions(laid, limits, book.hears, of.excursions),
      limitChecks: createLimits(laid, limits, book.hears, site),
      suppression: createSuppression(inForce, of.suppression),
    }
  }
  let on = stages(saved ?? {})
  const fouled = (i: number): boolean => on.watch.segment(i).growth !== null
  const s = {
    timed: saved?.timed ?? [],
    timelineN: saved?.timelineN ?? 0,
    production: saved?.production ?? false,
    armed: saved?.armed ?? false,
    inferred: saved?.inferred ?? false,
    ratio: saved?.ratio ?? layout.segments.map((): number | null => null),
    ratioMs: saved?.ratioMs ?? -1,
    lastRatio: saved?.lastRatio ?? layout.segments.map((): number | null => null),
    baseline: saved?.baseline ?? layout.segments.map((): BaselinePoint | null => null),
  }
  const guide = createGuide(
    layout,
    {
      input: (segments) => flushInput(segments, Object.fromEntries(layout.segments.map((g, i) => [g.spec.id, s.lastRatio[i]!]))),
      baseline: (i) => s.baseline[i] ?? null,
      alarms: () =>
        on.book.rows().flatMap(({ occurrence: o, active }) => (o === null ? [] : [{ kind: o.kind, segment: o.segment, active }])),
    },
    saved?.flush,
  )
  const grid = createGrid(skid, onScan, saved?.grid)
  const stepper = createStepper(layout, onStep, saved?.stepper)
  grid.setFlowing(s.production)

  const forAdvice = (): SegmentForAdvice[] =>
    layout.segments.map((g, i) => ({
      id: g.spec.id,
      kind: g.spec.kind,
      ratio: s.ratio[i] ?? null,
      growth: on.watch.segment(i).growth,
    }))
  const signal = (x: Signal) => {
    const logic = x.over === true ? on.suppression.by(x.kind, x.segment) : null
    const signalled = on.site.apply(x)
    if (logic !== null) on.book.suppress(x.key, signalled.priority, logic, true, x.tMs)
    on.book.signal(signalled)
  }

  function drainBook(): void {
    const { changes, records } = on.book.drain()
    for (const change of changes) {
      events.push({ kind: 'alarm', change })
      for (const advice of adviser.raised(change, forAdvice())) events.push({ kind: 'advice', tMs: change.tMs, advice })
    }
    for (const record of records) events.push({ kind: 'transition', record })
  }

  function drainGuide(tMs: number): void {
    const said = guide.signals(tMs)
    for (const x of said) signal(x)
    if (said.length > 0) drainBook()
    for (const course of guide.drain()) events.push({ kind: 'flush', tMs, course })
  }

  function onScan(scan: Scan): void {
    const endMs = scan.tMs + scanMs
    tookEffect(configuration.due(scan.tMs), scan.tMs)
    suppress(scan, endMs)
    stepper.scan(scan)
    const silent = instruments.scan(scan, endMs, grid.state, signal)
    on.limitChecks.scan(scan, endMs, { production: s.production, silent, fouled }, signal)
    on.excursions.scan(scan, endMs, { production: s.production, armed: s.armed }, signal)
    for (const t of s.timed) if (endMs >= t.untilMs) end(t.key, endMs)
    if (s.timed.length > 0) s.timed = s.timed.filter((t) => endMs < t.untilMs)
    on.book.tick(endMs)
    drainBook()
    guide.scan(scan, endMs)
    drainGuide(endMs)
    timeline(endMs)
    options.onScan?.(scan, endMs)
  }

  function onStep(step: Step): void {
    const endMs = step.tMs + stepMs / 2
    const out = on.watch.step(
      step,
      layout.segments.map((_, i) => highestDp(on.limits, i)),
    )
    if (out.mode.production !== s.production) {
      s.production = out.mode.production
      grid.setFlowing(s.production)
    }
    if (s.production) present.take(step)
    s.inferred = out.mode.inferred
    s.armed = out.mode.armed
    out.now.forEach((n, i) => {
      s.ratio[i] = n.ratio
      if (n.ratio !== null) s.lastRatio[i] = n.ratio
    })
    s.ratioMs = endMs
    for (const e of out.events) onWatch(e, endMs)
    if (out.mode.stops) endAll(endMs)
    drainBook()
    for (const advice of adviser.step(endMs, forAdvice())) events.push({ kind: 'advice', tMs: endMs, advice })
    events.push(stepSaid(out.now, endMs, s.production, s.inferred))
  }

  function onWatch(e: WatchEvent, tMs: number): void {
    switch (e.kind) {
      case 'bank':
        tell(verdictSaid(layout, e.event, e.onset, e.ratio, tMs, on.watch.charts), tMs)
        return
      case 'creep':
        tell(creepSaid(layout, e, tMs), tMs)
        return
      case 'baseline':
        present.baselined(e.segment)
        s.baseline[e.segment] =
          e.baseline.flowM3S === null || e.baseline.tempK === null
            ? null
            : { dpPa: e.baseline.dpPa, flowM3S: e.baseline.flowM3S, tempK: e.baseline.tempK }
        guide.baselined(e.segment, s.baseline[e.segment]!, e.baseline.provisional, tMs)
        drainGuide(tMs)
        events.push({ kind: 'baseline', segment: layout.segments[e.segment]!.spec.id, baseline: e.baseline })
        return
      case 'onset':
        events.push({ kind: 'onset', segment: layout.segments[e.segment]!.spec.id, onset: e.onset })
        return
      case 'below': {
        const id = layout.segments[e.segment]!.spec.id
        const text = `${id}: resistance below clean by ${(100 * e.share).toFixed(1)} % (ratio ${e.ratio.toFixed(3)}): ${belowClean}; its charts begin anew from there`
        events.push({ kind: 'note', tMs, text })
        return
      }
      case 'unjudged':
        events.push({ kind: 'note', tMs, text: unjudgedText(layout, e.segment, e.lacks) })
        return
      case 'cleared':
        end(`fouling:${layout.segments[e.segment]!.spec.id}`, tMs)
        return
      case 'forecast':
        return
    }
  }

  /** Passes on what a verdict of the watch says: an alarm, a note, and how long the alarm stands by itself. */
  function tell(said: Said, tMs: number): void {
    if (said.note !== null) events.push({ kind: 'note', tMs, text: said.note })
    if (said.signal === null) return
    const { key } = said.signal
    // Found again while the alarm of the first time still stands: that is news, told anew.
    if (said.anew) end(key, tMs)
    signal(said.signal)
    if (said.standsMs !== null) s.timed = [...s.timed.filter((t) => t.key !== key), { key, untilMs: tMs + said.standsMs }]
  }

  /** The condition of an alarm without a value of its own is over. */
  function end(key: string, tMs: number): void {
    if (!on.book.isActive(key)) return
    signal(overSignal(key, tMs))
  }

  /** Production stopped: what was found of it no longer stands. */
  function endAll(tMs: number): void {
    for (const t of s.timed) end(t.key, tMs)
    s.timed = []
  }

  function timeline(endMs: number): void {
    const fromMs = grid.state.firstMs
    while (fromMs + s.timelineN * timelineMs <= endMs) {
      const at = fromMs + s.timelineN * timelineMs
      const fresh = s.production && s.ratioMs >= 0 && at - s.ratioMs <= 4 * stepMs
      events.push({
        kind: 'timeline',
        tMs: at,
        points: layout.segments.map((g, i) => ({
          segment: g.spec.id,
          ratio: fresh ? (s.ratio[i] ?? null) : null,
          forecast: fresh ? (on.watch.segment(i).growth?.forecast ?? null) : null,
        })),
      })
      s.timelineN++
    }
  }

  function suppress(scan: Scan, tMs: number): void {
    const changed = on.suppression.scan(scan)
    for (const { logic, on } of changed) events.push({ kind: 'suppression', tMs, logic, on })
    if (changed.length > 0) on.book.design(on.suppression.by, tMs)
  }

  /** Settings have taken effect: the stages go on with them. */
  function tookEffect(took: readonly Took[], tMs: number): void {
    if (took.length === 0) return
    on = stages({
      book: on.book.state(),
      watch: on.watch.save(),
      excursions: on.excursions.state(),
      suppression: on.suppression.state,
    })
    const paths = took.flatMap(({ applied }) => applied.changes.map((c) => c.path))
    if (paths.some((p) => p.startsWith('detection.'))) on.watch.redesign()
    for (const { applied, left } of took) {
      events.push({ kind: 'configuration', tMs, applied })
      for (const text of left) events.push({ kind: 'note', tMs, text: `not changed: ${text}` })
    }
    layout.segments.forEach((g, i) => {
      if (paths.includes(`segments.${g.spec.id}.baselineVersion`)) anew(i, tMs)
    })
    on.book.design(on.suppression.by, tMs)
  }

  /** A step test's figures are where the watch starts from; once it has read, it knows better. */
  function commissioned(act: Extract<Act, { kind: 'commissioned' }>): void {
    if (grid.state.firstMs >= 0) {
      events.push({ kind: 'note', tMs: act.tMs, text: 'step test kept, not used: the run had begun' })
      return
    }
    known = act.known
    on = stages({ book: on.book.state(), excursions: on.excursions.state(), suppression: on.suppression.state })
  }

  function anew(segment: number, tMs: number): void {
    for (const e of on.watch.anew(segment)) onWatch(e, tMs)
  }

  function onAct(act: Act): void {
    events.push({ kind: 'act', act })
    const atMs = grid.state.firstMs < 0 ? -1 : act.tMs
    if (act.kind === 'commissioned') commissioned(act)
    else if (act.kind === 'settings' || act.kind === 'limit') tookEffect(configuration.take(act, atMs), act.tMs)
    else if (act.kind === 'flush-step' || act.kind === 'flush-check') {
      // Once water is in, the last ratio of production says nothing of the deposit any more.
      if (guide.act(act)) s.lastRatio.fill(null)
      drainGuide(act.tMs)
    } else if (act.kind === 'event') {
      const unused = unusedWhy(configuration.skid(), act)
      if (unused !== null) events.push({ kind: 'note', tMs: act.tMs, text: `${act.event}: kept, not used: ${unused}` })
      const water = waterResult(configuration.skid(), act)
      const old = configuration.skid().streams.find((x) => x.id === water?.stream)?.waterPpm ?? null
      if (water !== null) {
        const change = { path: `streams.${water.stream}.waterPpm`, old, new: water.ppm }
        tookEffect([configuration.enter(change, act.person, act.event, atMs)], act.tMs)
      }
      const filter = filterChanged(configuration.skid(), act)
      if (filter !== null)
        anew(
          layout.segments.findIndex((g) => g.spec.id === filter),
          act.tMs,
        )
    } else on.book.act(act)
    drainBook()
  }

  const take = (): readonly PipelineEvent[] => {
    if (events.length === 0) return nothing
    const out = events
    events = []
    return out
  }

  return {
    layout,
    push(entry: Entry): readonly PipelineEvent[] {
      if (entry.kind === 'rows') grid.rows(entry.block)
      else if (entry.kind === 'tick') grid.tick(entry.tMs)
      else onAct(entry.act)
      return take()
    },
    /** Rows of a block from `row` on that bring nothing about, or what that row brings about; `next` is the first not taken in. For who must know which row did. */
    pushSome(block: RowBlock, row: number): { next: number; events: readonly PipelineEvent[] } {
      return { next: grid.some(block, row), events: take() }
    },
    /** The configuration in force. */
    skid: configuration.skid,
    /** End of a finished log: the last scans close. */
    finish(): readonly PipelineEvent[] {
      grid.finish()
      return take()
    },
    /** Counts and current knowledge, for the report's head and for screens. Read only. */
    view: () => ({
      grid: grid.state,
      production: s.production,
      inferred: s.inferred,
      ratio: s.ratio,
      /** The configuration in force, and how it came about. */
      skid: configuration.skid(),
      configuration: configuration.state,
      limits: on.limits,
      segment: on.watch.segment,
      learned: on.watch.learned,
      present,
      alarms: on.book.rows(),
      /** The flush under way or the last one, with its plan; null before any. */
      flush: guide.state.course === null ? null : { course: guide.state.course, plan: guide.state.plan },
    }),
    save: (): PipelineState =>
      structuredClone({
        version: 1 as const,
        grid: grid.save(),
        stepper: stepper.state,
        watch: on.watch.save(),
        book: on.book.state(),
        instruments: instruments.state,
        excursions: on.excursions.state(),
        adviser: adviser.state,
        present: present.state,
        flush: guide.state,
        configuration: configuration.state,
        suppression: on.suppression.state,
        ...s,
      }),
  }
}
export type Pipeline = ReturnType<typeof createPipeline>

function highestDp(limits: LimitTable, i: number): { name: LimitName; pa: number } | null {
  const high = limits[i]!.dpHighBar
  if (high !== null) return { name: 'dpHighBar', pa: paFromBar(high) }
  const highHigh = limits[i]!.dpHighHighBar
  return highHigh === null ? null : { name: 'dpHighHighBar', pa: paFromBar(highHigh) }
}

export type { PipelineOptions, PipelineState }
