import { type Phase, phases } from '../reading.ts'
import type { Scan } from '../scan/grid.ts'
import type { Skid } from '../skid.ts'

/** Plain JSON. */
export interface SuppressionState {
  /** Index of the log's last phase word and when it stood; −1: none yet. */
  phase: number
  phaseMs: number
  /** Names of the logic that holds now. */
  holding: string[]
}

/** A phase word holds so long without another; then nothing is known of the phase. */
const knownForMs = 60_000

/**
 * Suppression by design (ALM-09): named logic of the skid file, "these alarms while the log's phase is one of these", evaluated at every scan.
 * It ends with its condition, and with the knowledge of it: a log that no longer says its phase suppresses nothing. State changes in place.
 */
export function createSuppression(skid: Skid, state: SuppressionState = { phase: -1, phaseMs: 0, holding: [] }) {
  const rules = Object.entries(skid.suppression ?? {}).filter(([, r]) => r.alarms.length > 0 && r.phases.length > 0)
  return {
    state,
    /** Logic that began or ended to hold with this scan; empty as a rule. */
    scan(scan: Scan): { readonly logic: string; readonly on: boolean }[] {
      if (rules.length === 0 && state.holding.length === 0) return none
      if (scan.phase >= 0) {
        state.phase = scan.phase
        state.phaseMs = scan.tMs
      }
      const phase: Phase | null = state.phase < 0 || scan.tMs - state.phaseMs > knownForMs ? null : (phases[state.phase] ?? null)
      const now = phase === null ? [] : rules.filter(([, r]) => r.phases.includes(phase)).map(([name]) => name)
      if (now.length === state.holding.length && now.every((n, i) => n === state.holding[i])) return none
      const changed = [
        ...state.holding.filter((n) => !now.includes(n)).map((logic) => ({ logic, on: false })),
        ...now.filter((n) => !state.holding.includes(n)).map((logic) => ({ logic, on: true })),
      ]
      state.holding = now
      return changed
    },
    /** The logic that suppresses an alarm now; null where none does. */
    by(kind: string, segment: string | null): string | null {
      if (state.holding.length === 0) return null
      const named = rules.find(
        ([name, r]) =>
          state.holding.includes(name) && r.alarms.some((a) => a === kind || (segment !== null && a === `${kind}:${segment}`)),
      )
      return named?.[0] ?? null
    },
  }
}

const none: { readonly logic: string; readonly on: boolean }[] = []
