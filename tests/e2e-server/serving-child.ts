import { readFileSync } from 'node:fs'
import { startServing, type Watched } from '../../server/cli/serving.ts'
import { loadSkid } from '../../server/skid/check.ts'
import { openStore } from '../../server/store/open.ts'

// A server on a store, with short beats and snapshots so that a kill may fall anywhere: DATA SKID SPEED [FOLLOWED].
const [data = '', file = '', speed = '600', followed] = process.argv.slice(2)
const text = readFileSync(file, 'utf8')
const watched: Watched = {
  skid: loadSkid(text, file),
  file,
  text,
  source:
    followed === undefined ? { kind: 'simulated', speed: Number(speed) } : { kind: 'followed', path: followed, startMs: null },
}
const store = openStore(data, { keys: process.env['CLEARBORE_KEYS'] ?? '' })
const serving = await startServing({
  store,
  watched: [watched],
  isDemo: followed === undefined,
  host: '127.0.0.1',
  port: 0,
  tryPorts: 0,
  webRoot: null,
  toolVersion: 'test',
  log: (line) => process.stderr.write(`${line}\n`),
  onFatal: (error) => {
    process.stderr.write(`${(error as Error).stack}\n`)
    process.exit(3)
  },
  beatMs: 60,
  snapshotMs: 400,
})
process.stdout.write(`listening ${serving.port}\n`)
process.once('SIGTERM', async () => {
  await serving.stop()
  store.close()
  process.exit(0)
})
