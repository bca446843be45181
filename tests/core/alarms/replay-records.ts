import { type AlarmRecord, type AlarmState, type Input, normal, type Policy } from '../../../server/core/alarms/alarm-state.ts'
import { transition } from '../../../server/core/alarms/machine.ts'

/** The state after a journal: replays every accepted input of one alarm in order, so the record alone restores the alarm (ALM-10). */
export function replayRecords(records: readonly AlarmRecord[], policy: Policy): AlarmState {
  // What a record says was allowed then stays allowed, whatever the limits of shelving are now.
  const then = { ...policy, shelveMaxS: Number.MAX_VALUE, shelveCapS: Number.MAX_VALUE, reasonMin: 0 }
  let state = normal
  for (const r of records) {
    if (r.outcome === 'refused' || r.input === 'comment') continue
    const input: Input = {
      kind: r.input,
      ...(r.person === null ? {} : { person: r.person }),
      ...(r.logic === null ? {} : { logic: r.logic }),
      ...(r.reason === null ? {} : { reason: r.reason }),
      ...(r.durationS === null ? {} : { durationS: r.durationS }),
      oneShot: r.oneShot,
    }
    state = transition(state, input, { ...r, policy: then }).state
  }
  return state
}
