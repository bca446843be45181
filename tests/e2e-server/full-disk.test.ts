import { spawn } from 'node:child_process'
import { join } from 'node:path'
import { afterAll, expect, it } from 'vitest'
import { openStore } from '../../server/store/open.ts'
import { tempDir } from '../monitor/bench.ts'
import { bundled, dropBundles } from './children.ts'

afterAll(dropBundles)

it('a disk that takes no more while serving (a limit of the system on file size stands for it) ends it with one line, what to do, and 3; what was acknowledged is sound', async () => {
  const data = join(tempDir(), 'data')
  const main = bundled('server/main.ts')
  const child = spawn(
    'bash',
    ['-c', `ulimit -f 600; exec "$0" "$@"`, process.execPath, main, 'serve', '--data', data, '--port', '0', '--speed', '3600'],
    {
      stdio: ['ignore', 'ignore', 'pipe'],
    },
  )
  let err = ''
  child.stderr.on('data', (chunk) => {
    err += chunk
  })
  expect(await new Promise((done) => child.once('close', done))).toBe(3)
  expect(err.trimEnd().split('\n').length).toBe(1)
  expect(err).toMatch(/^the disk failed on the store in .*; check the disk and its free space/)
  const store = openStore(data)
  expect(store.check()).toEqual([])
  expect(store.runs.list()[0]?.state).toBe('live')
  store.close()
})
