import fc from 'fast-check'
import { describe, expect, it } from 'vitest'
import {
  type AlarmRecord,
  type AlarmState,
  alarmStates,
  type Context,
  type Input,
  type InputKind,
  inputKinds,
  normal,
  type Policy,
  stateName,
} from '../../../server/core/alarms/alarm-state.ts'
import { transition } from '../../../server/core/alarms/machine.ts'
import { replayRecords } from './replay-records.ts'

const policyOf = (latching: boolean): Policy => ({ latching, shelveMaxS: 1800, shelveCapS: 28800, reasonMin: 5 })
const context = (latching: boolean, tMs = 0): Context => ({
  tMs,
  alarm: 1,
  key: 'exotherm:R1',
  policy: policyOf(latching),
  priority: 'medium',
  configVersion: 'v1',
  value: 1,
  limit: 0.5,
  unit: 'K',
})
const full = (kind: InputKind): Input => ({
  kind,
  ...(kind.startsWith('sbd') ? { logic: 'pump stopped' } : { person: 'M. Ovalle', reason: 'checked at the panel' }),
  ...(kind === 'shv' ? { durationS: 600 } : {}),
})
const walk = (kinds: readonly InputKind[], latching: boolean, from: AlarmState = normal) => {
  const records: AlarmRecord[] = []
  let state = from
  kinds.forEach((kind, i) => {
    const out = transition(state, full(kind), context(latching, 1000 * i))
    state = out.state
    records.push(...out.records)
  })
  return { state, records }
}

/** How each state is reached from normal. */
const paths: Record<string, { latching: boolean; by: InputKind[] }> = {
  NORM: { latching: false, by: [] },
  UNACK: { latching: false, by: ['act'] },
  ACKED: { latching: false, by: ['act', 'ack'] },
  RTNUN: { latching: false, by: ['act', 'clr'] },
  LUNACK: { latching: true, by: ['act', 'clr'] },
  LACKED: { latching: true, by: ['act', 'ack', 'clr'] },
  SHELVED: { latching: false, by: ['shv'] },
  SBD: { latching: false, by: ['sbd+'] },
  OOS: { latching: false, by: ['oos+'] },
}

describe('the transition table of ISA-18.2 (from memory) and OPC 10000-9 cl. 5.8, row by row', () => {
  const columns = ['act', 'clr', 'ack', 'rst', 'shv', 'sbd+', 'oos+', 'qbad'] as const
  // '=' no change, no record; '!' no change, journalled as refused; '~' tracked or marked with a record; a name: the new state.
  const table: Record<string, string> = {
    NORM: 'UNACK = ! ! SHELVED SBD OOS ~',
    UNACK: '= RTNUN ACKED ! SHELVED SBD OOS ~',
    ACKED: '= NORM ! ! SHELVED SBD OOS ~',
    RTNUN: 'UNACK = NORM ! SHELVED SBD OOS ~',
    LUNACK: 'UNACK = LACKED ! SHELVED SBD OOS ~',
    LACKED: 'UNACK = ! NORM SHELVED SBD OOS ~',
    SHELVED: '~ = ! ! ~ SBD OOS ~',
    SBD: '~ = ! ! SBD = OOS ~',
    OOS: '~ = ! ! ! OOS ! ~',
  }
  for (const [from, row] of Object.entries(table)) {
    for (const [i, want] of row.split(' ').entries()) {
      const input = columns[i] as InputKind
      it(`${from} on ${input} gives ${want}`, () => {
        const path = paths[from]!
        const before = walk(path.by, path.latching).state
        expect(stateName(before)).toBe(from)
        const { state, records } = transition(before, full(input), context(path.latching))
        const outcome = records[0]?.outcome
        if (want === '=') {
          expect(state).toEqual(before)
          expect(records).toEqual([])
        } else if (want === '!') {
          expect(state).toEqual(before)
          expect(outcome).toBe('refused')
          expect(records[0]?.reason).toContain('checked at the panel')
        } else if (want === '~') {
          expect(stateName(state)).toBe(from)
          expect(['tracked', 'marked']).toContain(outcome)
        } else {
          expect(stateName(state)).toBe(want)
          expect(outcome).toBe('moved')
          expect(records[0]).toMatchObject({ from, to: want, sound: want === 'UNACK' })
        }
        expect(records.length).toBeLessThanOrEqual(1)
      })
    }
  }
  it('latching alarms return to LUNACK from UNACK and to LACKED from ACKED', () => {
    expect(stateName(walk(['act', 'clr'], true).state)).toBe('LUNACK')
    expect(stateName(walk(['act', 'ack', 'clr'], true).state)).toBe('LACKED')
  })
  it('re-alarm turns ACKED into UNACK with sound and is ignored in the other eight states', () => {
    for (const [from, path] of Object.entries(paths)) {
      const { state, records } = transition(walk(path.by, path.latching).state, { kind: 'rea' }, context(path.latching))
      expect([stateName(state), records.some((r) => r.sound)]).toEqual(from === 'ACKED' ? ['UNACK', true] : [from, false])
    }
  })
})

describe('the release rule ALM-05', () => {
  const course = (latching: boolean, ...kinds: InputKind[]) => walk(kinds, latching)
  // ALM-05
  it('(1) active now sounds again, even if acknowledged before', () => {
    const { state, records } = course(false, 'act', 'ack', 'shv', 'uns')
    expect(stateName(state)).toBe('UNACK')
    expect(records.at(-1)).toMatchObject({ input: 'uns', sound: true })
  })
  // ALM-05
  it('(2) latching and active just before or during the suppression gives LUNACK without sound', () => {
    for (const path of [
      ['act', 'shv', 'clr', 'uns'],
      ['shv', 'act', 'clr', 'uns'],
      ['act', 'ack', 'oos+', 'clr', 'oos-'],
    ] as InputKind[][]) {
      const { state, records } = walk(path, true)
      expect(stateName(state)).toBe('LUNACK')
      expect(records.filter((r) => r.sound).length).toBe(path[0] === 'act' ? 1 : 0)
    }
  })
  it('(3) a latch held before is the latch held after', () => {
    expect(stateName(course(true, 'act', 'clr', 'sbd+', 'sbd-').state)).toBe('LUNACK')
    expect(stateName(course(true, 'act', 'ack', 'clr', 'shv', 'uns').state)).toBe('LACKED')
  })
  it('(4) what logic took away unacknowledged comes back RTNUN; what a person took away with a reason comes back NORM', () => {
    expect(stateName(course(false, 'act', 'sbd+', 'clr', 'sbd-').state)).toBe('RTNUN')
    expect(stateName(course(false, 'act', 'clr', 'sbd+', 'sbd-').state)).toBe('RTNUN')
    expect(stateName(course(false, 'act', 'shv', 'clr', 'uns').state)).toBe('NORM')
  })
  // ALM-05
  it('(5) otherwise NORM; and one suppression of two taken off leaves the other in force', () => {
    expect(stateName(course(false, 'sbd+', 'act', 'clr', 'sbd-').state)).toBe('NORM')
    expect(stateName(course(false, 'shv', 'sbd+', 'oos+', 'oos-').state)).toBe('SBD')
    expect(stateName(course(false, 'shv', 'sbd+', 'sbd-').state)).toBe('SHELVED')
  })
  it('a one-shot shelf ends when the condition clears, with one record', () => {
    const shelved = transition(walk(['act'], true).state, { ...full('shv'), oneShot: true }, context(true)).state
    const { state, records } = transition(shelved, { kind: 'clr' }, context(true))
    expect([stateName(state), records.length, records[0]?.sound]).toEqual(['LUNACK', 1, false])
  })
})

describe('who may ask, and for how long', () => {
  const refuse = (state: AlarmState, input: Input) => {
    const out = transition(state, input, context(false))
    expect(out.state).toEqual(state)
    expect(out.records).toHaveLength(1)
    return out.records[0]?.reason
  }
  // ALM-07
  it('acknowledging and resetting need an identified person, suppressing by design the name of its logic', () => {
    expect(refuse(walk(['act'], false).state, { kind: 'ack', person: '  ' })).toMatch(/identified person/)
    expect(refuse(normal, { kind: 'rst' })).toMatch(/identified person/)
    expect(refuse(normal, { kind: 'sbd+' })).toMatch(/name of its logic/)
  })
  // ALM-08, USR-05
  it('shelving needs a reason and a duration of at most 30 min, 8 h in all with extensions', () => {
    expect(refuse(normal, { ...full('shv'), reason: 'x' })).toMatch(/at least 5 characters/)
    expect(refuse(normal, { ...full('shv'), durationS: 1801 })).toMatch(/30 min/)
    expect(refuse(normal, { ...full('shv'), durationS: 0 })).toMatch(/duration/)
    let state = normal
    let asked = 0
    for (let t = 0; ; t += 1500e3) {
      const out = transition(state, { ...full('shv'), durationS: 1800 }, context(false, t))
      state = out.state
      asked++
      if (out.records[0]?.outcome === 'refused') break
    }
    expect(state.shelved!.untilMs - state.shelved!.sinceMs).toBeLessThanOrEqual(28800e3)
    expect(asked).toBe(20) // the first and 18 extensions of 25 min: 18 · 1500 s + 1800 s = 8 h; one more is past it
  })
})

describe('bad inputs (ALM-06)', () => {
  it('a bad input neither sets nor clears: act and clr wait for qgood in every state', () => {
    for (const path of Object.values(paths)) {
      const bad = walk([...path.by, 'qbad'], path.latching).state
      for (const kind of ['act', 'clr'] as const)
        expect(transition(bad, { kind }, context(path.latching))).toEqual({ state: bad, records: [] })
    }
    expect(stateName(walk(['act', 'qbad', 'clr', 'qgood', 'clr'], false).state)).toBe('RTNUN')
  })
})

describe('invariants under random walks (ALM-10, ALM-11)', () => {
  const input = fc.constantFrom(...inputKinds).map((kind) => full(kind))
  const bare = fc.constantFrom(...inputKinds).map((kind): Input => ({ kind }))
  const steps = fc.array(fc.oneof({ weight: 4, arbitrary: input }, { weight: 1, arbitrary: bare }), { maxLength: 60 })
  // ALM-10
  it('every record names a real state, at most one record an input, no sound from a suppressed state, and the journal alone restores the state', () => {
    fc.assert(
      fc.property(steps, fc.boolean(), (inputs, latching) => {
        let state = normal
        const journal: AlarmRecord[] = []
        inputs.forEach((i, n) => {
          const out = transition(Object.freeze(state), i, context(latching, 1000 * n))
          expect(out.records.length).toBeLessThanOrEqual(1)
          if (out.records.length === 0) expect(out.state).toEqual(state)
          for (const r of out.records) {
            expect(alarmStates).toContain(r.to)
            if (r.sound) expect(r.to).toBe('UNACK')
            if (r.outcome === 'refused') expect(out.state).toEqual(state)
          }
          state = JSON.parse(JSON.stringify(out.state))
          journal.push(...out.records)
          expect(replayRecords(journal, policyOf(latching))).toEqual(state)
        })
      }),
      { numRuns: 300 },
    )
  })
  // ALM-11
  it('an unacknowledged alarm reaches NORM only through ack or a suppression by a named person with a reason', () => {
    fc.assert(
      fc.property(steps, fc.boolean(), (inputs, latching) => {
        let state = normal
        let owed = false
        inputs.forEach((i, n) => {
          const out = transition(state, i, context(latching, 1000 * n))
          const r = out.records[0]
          if (r?.sound === true) owed = true
          if (
            r?.outcome === 'moved' &&
            (r.input === 'ack' || ((r.input === 'shv' || r.input === 'oos+') && r.person !== null && r.reason !== null))
          )
            owed = false
          state = out.state
          if (owed) expect(stateName(state)).not.toBe('NORM')
        })
      }),
      { numRuns: 500 },
    )
  })
  // ALM-11
  it('acknowledging twice is acknowledging once', () => {
    fc.assert(
      fc.property(steps, fc.boolean(), (inputs, latching) => {
        let state = normal
        for (const i of inputs) state = transition(state, i, context(latching)).state
        const once = transition(state, full('ack'), context(latching)).state
        expect(transition(once, full('ack'), context(latching)).state).toEqual(once)
      }),
    )
  })
  // ALM-11
  it('a restart leaves the state as it was and one record behind', () => {
    for (const path of Object.values(paths)) {
      const before = walk(path.by, path.latching).state
      const out = transition(before, { kind: 'restart' }, context(path.latching))
      expect([out.state, out.records.map((r) => r.input)]).toEqual([before, ['restart']])
    }
  })
})
