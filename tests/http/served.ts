import { onTestFinished } from 'vitest'
import { buildApp } from '../../server/app.ts'
import type { Scenario } from '../../server/core/sim/scenario.ts'
import { exportRun } from '../../server/export-run.ts'
import { createImports } from '../../server/imports.ts'
import { createCatalogue } from '../../server/monitor/catalogue.ts'
import { createPeople } from '../../server/people/people.ts'
import type { Role } from '../../server/people/roles.ts'
import { createHasher, type ScryptCost } from '../../server/people/scrypt.ts'
import { loadSkid } from '../../server/skid/check.ts'
import { handClock, shortNight, simulatedBench, tempDir } from '../monitor/bench.ts'

export const local = { host: '127.0.0.1:8460' }
export const secret = 'a kettle under the blue staircase'
/** Passwords in tests cost a thousandth. */
export const cheap: ScryptCost = { logN: 6, r: 8, p: 1 }

/** The whole app over a simulated run whose time the test passes by hand; closed when the test ends. */
export async function served(
  more: {
    scenario?: Scenario
    hosts?: string[]
    uploadMaxBytes?: number
    heartbeatMs?: number
    webRoot?: string
    /** False: acts need somebody who has signed in. */
    demo?: boolean
    openReading?: boolean
    publicUrl?: string
    trustProxy?: string[]
    mostPerMinute?: number
    cost?: ScryptCost
  } = {},
) {
  const bench = simulatedBench(tempDir(), more.scenario ?? shortNight(3))
  const { store, monitor } = bench
  const lines: string[] = []
  const log = (line: string) => lines.push(line)
  let told = (): void => undefined
  const wall = handClock(Date.UTC(2031, 0, 1))
  const wallMs = wall.now
  const hasher = createHasher({ cost: more.cost ?? cheap })
  const people = createPeople({ store, wallMs, hasher })
  const imports = createImports({ store, skidOf: loadSkid, toolVersion: '9.9.9', wallMs, log, changed: () => told() })
  const catalogue = createCatalogue(store, loadSkid, {
    engine: monitor.engine,
    clock: monitor.clock,
    sourceFault: () => null,
    importing: imports.busy,
  })
  const { app, hub, publisher } = await buildApp({
    store,
    monitor,
    catalogue,
    toolVersion: '9.9.9',
    people,
    isDemo: () => more.demo ?? true,
    openReading: more.openReading ?? true,
    publicUrl: more.publicUrl ?? null,
    trustProxy: more.trustProxy ?? [],
    ...(more.mostPerMinute === undefined ? {} : { mostPerMinute: more.mostPerMinute }),
    wallMs,
    uploadMaxBytes: more.uploadMaxBytes ?? 2 ** 22,
    exportRun,
    skidOf: loadSkid,
    importLogs: (job) => catalogue.row(imports.begin(job)),
    webRoot: more.webRoot ?? null,
    hosts: more.hosts ?? [],
    log,
    ...(more.heartbeatMs === undefined ? {} : { heartbeatMs: more.heartbeatMs }),
  })
  monitor.publishTo(publisher)
  told = publisher.runs
  onTestFinished(async () => {
    await app.close()
    await imports.stop()
    await monitor.stop()
    store.close()
  })
  /** Passes minutes of the run in beats of one. */
  const live = async (minutes: number): Promise<void> => {
    for (let i = 0; i < minutes; i++) {
      bench.clock.pass(1000)
      await monitor.beat()
    }
  }
  /** Headers of a browser in which a person of a role has signed in. The first administrator is made beside. */
  const as = async (role: Role): Promise<{ cookie: string; origin: string }> => {
    if (!people.any()) await people.links.use(people.administratorLink(), { name: 'Odo Fenn', password: secret })
    const name = `Person ${'abcdefghijklmnopqrstuvwxyz'[people.accounts.list().length]}`
    const { token } = people.accounts.add(name, role, { id: 1, name: 'Odo Fenn', reason: 'a test' })
    const session = await people.links.use(token, { name: null, password: secret })
    return { cookie: `clearbore=${session}`, origin: `http://${local.host}` }
  }
  const get = async (url: string, headers: Record<string, string> = {}) => {
    const reply = await app.inject({ url, headers: { ...local, ...headers } })
    return { status: reply.statusCode, headers: reply.headers, text: reply.body, json: () => reply.json() }
  }
  const post = async (url: string, payload: unknown, headers: Record<string, string> = {}) => {
    const reply = await app.inject({ method: 'POST', url, headers: { ...local, ...headers }, payload: payload as object })
    return { status: reply.statusCode, json: () => reply.json() }
  }
  return { ...bench, app, people, as, hasher, wall, hub, imports, catalogue, log: lines, live, get, post }
}
export type Served = Awaited<ReturnType<typeof served>>
