// The commands of package.json: `node scripts NAME` (a folder name works on every system without path separators).
// Nothing here needs an installed package until `ensureInstalled` has run.
import { spawnSync } from 'node:child_process'
import { ensureBuilt, ensureInstalled, root } from './prepare.js'

const tasks = {
  start: async () => {
    ensureInstalled()
    await ensureBuilt()
    stopWithShell()
    process.argv.splice(2, process.argv.length, 'serve', ...rest)
    await import('../dist/server/main.js')
  },
  test: async () => (await import('./test.js')).test(rest),
  build: async () => {
    ensureInstalled()
    await ensureBuilt({ force: true })
  },
  lint: async () => tool('biome', ['ci', '--colors=off', '.']),
  format: async () => tool('biome', ['check', '--write', '.']),
  typecheck: async () => {
    tool('tsc', ['-p', '.'])
    tool('tsc', ['-p', 'web'])
  },
  soak: async () => (await import('./test.js')).soak(rest),
  bench: async () => (await import('./test.js')).bench(rest),
  fixtures: async () => (await import('./fixtures.js')).fixtures(),
  ablate: async () => {
    ensureInstalled()
    await (await import('./ablate.js')).ablate(rest)
  },
  unused: async () => (await import('./unused.js')).unused(),
}

/**
 * npm runs a script through a shell and passes SIGTERM to that shell alone, which dies of it and leaves the server behind. So the server
 * watches for its shell and, once it is gone, stops as if the signal had come to it.
 */
function stopWithShell() {
  if (process.platform === 'win32' || process.env.npm_lifecycle_event !== 'start') return
  const shell = process.ppid
  const watch = setInterval(() => {
    if (process.ppid === shell) return
    clearInterval(watch)
    process.kill(process.pid, 'SIGTERM')
  }, 500)
  watch.unref()
}

/** Runs a development tool of node_modules and ends with its code when it fails. */
function tool(name, args) {
  ensureInstalled()
  const { status } = spawnSync(process.execPath, [binOf(name), ...args], { cwd: root, stdio: 'inherit' })
  if (status !== 0) process.exit(status ?? 1)
}

function binOf(name) {
  return { biome: 'node_modules/@biomejs/biome/bin/biome', tsc: 'node_modules/typescript/bin/tsc' }[name]
}

const [name, ...rest] = process.argv.slice(2)
const task = Object.hasOwn(tasks, name ?? '') ? tasks[name] : undefined
if (task === undefined) {
  process.stderr.write(`scripts: one of ${Object.keys(tasks).join(', ')}, got '${name ?? ''}'\n`)
  process.exit(2)
}
await task()
