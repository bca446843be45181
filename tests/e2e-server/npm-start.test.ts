import { spawn } from 'node:child_process'
import { mkdtempSync, rmSync } from 'node:fs'
import { tmpdir } from 'node:os'
import { join } from 'node:path'
import { fileURLToPath } from 'node:url'
import { describe, expect, it } from 'vitest'
import { openStore } from '../../server/store/open.ts'

const root = fileURLToPath(new URL('../../', import.meta.url))

describe.runIf(process.platform !== 'win32')('the start script under npm', () => {
  it('stops and lets go of its data folder within 5 s when SIGTERM ends the shell npm runs it in', async () => {
    const data = mkdtempSync(join(tmpdir(), 'clearbore-npm-start-'))
    // As npm does: a shell between, and the name of the script in the environment. The `:` at the end keeps the shell from becoming the server.
    const shell = spawn('sh', ['-c', `node scripts start --data ${data}; :`], {
      cwd: root,
      env: { ...process.env, npm_lifecycle_event: 'start' },
      stdio: ['ignore', 'pipe', 'inherit'],
    })
    const ended = new Promise((done) => shell.on('close', done))
    let out = ''
    const url = await new Promise<string>((done, fail) => {
      shell.on('exit', () => fail(new Error(`ended early: ${out}`)))
      shell.stdout.on('data', (d) => {
        out += String(d)
        const at = /http:\S+/.exec(out)
        if (at !== null) done(at[0])
      })
    })
    expect((await fetch(new URL('api/runs', url))).status).toBe(200)
    shell.removeAllListeners('exit')
    const began = Date.now()
    shell.kill('SIGTERM')
    // stdout closes when the server, which holds it too, is gone.
    await ended
    expect(Date.now() - began).toBeLessThan(5000)
    await expect(fetch(new URL('api/runs', url))).rejects.toThrow()
    openStore(data).close()
    rmSync(data, { recursive: true })
  })
})
