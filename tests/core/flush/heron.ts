import { readFileSync } from 'node:fs'
import type { SegmentSpec, Skid } from '../../../server/core/skid.ts'
import { loadSkid } from '../../../server/skid/check.ts'

const file = new URL('../../../fixtures/skids/heron.yaml', import.meta.url)
/** The demo skid as the check reads it. */
export const heron: Skid = loadSkid(readFileSync(file, 'utf8'), 'heron.yaml')

/** The same with one thing changed in every segment, or in one. */
export const changed = (change: (s: SegmentSpec) => Partial<SegmentSpec>, id: string | null = null): Skid => ({
  ...heron,
  segments: heron.segments.map((s) => (id === null || s.id === id ? { ...s, ...change(s) } : s)),
})

/** The demo skid's usual rates and temperatures, as its file states them. */
export const usual = {
  flows: { A: 6, B: 2.04, C: 0.6, D: 12 },
  temperatures: {
    'TT-101': -19,
    'TT-102': -19,
    'TT-103': -19,
    'TT-111': -18,
    'TT-112': -17,
    'TT-113': -19,
    'TT-121': -18,
    'TT-122': -19,
    'TT-131': 20,
    'TT-132': 22,
    'TT-190': -24,
    'TT-191': 18,
  },
}
