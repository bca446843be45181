import { Ajv } from 'ajv'
import { expect, it } from 'vitest'
import { comparisonSchema } from '../../server/http/schemas.ts'
import type { Comparison } from '../../server/wire/comparison.ts'
import { served } from './served.ts'

// USR-09
it('lays runs over each other in a segment that both have, as the schema says, and refuses what cannot be laid over', async () => {
  const s = await served()
  await s.live(40)
  const reply = await s.get(`/api/comparison?runs=${s.run}&segment=R1&by=volume&buckets=50`)
  expect(reply.status).toBe(200)
  const body = reply.json() as Comparison
  const check = new Ajv({ strict: false }).compile(comparisonSchema)
  expect({ ok: check(body), errors: check.errors }).toEqual({ ok: true, errors: null })
  expect(body).toMatchObject({ segment: 'R1', by: 'volume', unit: 'L', runs: [{ run: s.run, skid: 'heron' }] })
  expect(body.runs[0]!.x.at(-1)!).toBeGreaterThan(1)
  const refused = async (query: string) => {
    const r = await s.get(`/api/comparison?${query}`)
    return [r.status, (r.json() as { code: string }).code]
  }
  expect(await refused(`runs=${s.run}&segment=R9`)).toEqual([404, 'TAG_UNKNOWN'])
  expect(await refused('runs=999&segment=R1')).toEqual([404, 'RUN_UNKNOWN'])
  expect(await refused('runs=1,2,3,4,5,6,7&segment=R1')).toEqual([400, 'USAGE'])
  expect((await refused('runs=1;DROP TABLE run&segment=R1'))[0]).toBe(400)
})
