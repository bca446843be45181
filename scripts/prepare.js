// Installs what is missing and builds what is stale, so that every command of the README works on a bare clone.
import { spawnSync } from 'node:child_process'
import { createHash } from 'node:crypto'
import { existsSync, mkdirSync, readdirSync, readFileSync, statSync, writeFileSync } from 'node:fs'
import { dirname, join } from 'node:path'
import { fileURLToPath } from 'node:url'

export const root = dirname(dirname(fileURLToPath(import.meta.url)))
const at = (...parts) => join(root, ...parts)

/** `npm ci` unless node_modules already fits the lock file. Progress goes to stderr: stdout belongs to the command. */
export function ensureInstalled() {
  const [major, minor] = process.versions.node.split('.').map(Number)
  if (major < 20 || (major === 20 && minor < 19)) {
    process.stderr.write(`clearbore needs Node 20.19 or newer, this is ${process.versions.node}\n`)
    process.exit(3)
  }
  const stamp = at('node_modules', '.clearbore-installed')
  const lock = createHash('sha256')
    .update(readFileSync(at('package-lock.json')))
    .update(process.versions.modules)
    .update(process.platform)
    .digest('hex')
  if (existsSync(stamp) && readFileSync(stamp, 'utf8') === lock) return
  process.stderr.write('clearbore: installing packages (once; better-sqlite3 may compile for two or three minutes) …\n')
  const npm = process.platform === 'win32' ? 'npm.cmd' : 'npm'
  const run = spawnSync(npm, ['ci', '--no-audit', '--no-fund', '--loglevel=error'], {
    cwd: root,
    stdio: ['ignore', 2, 2],
    shell: process.platform === 'win32',
    env: { JOBS: '2', ...process.env },
  })
  if (run.status !== 0) {
    process.stderr.write(
      'clearbore: npm ci failed (above); it needs the npm registry, and a C++ compiler with python3 where better-sqlite3 has no binary\n',
    )
    process.exit(3)
  }
  mkdirSync(dirname(stamp), { recursive: true })
  writeFileSync(stamp, lock)
}

/** Newest change in a folder, ms. */
function newest(dir) {
  let top = 0
  if (!existsSync(dir)) return top
  for (const entry of readdirSync(dir, { withFileTypes: true })) {
    const path = join(dir, entry.name)
    top = Math.max(top, entry.isDirectory() ? newest(path) : statSync(path).mtimeMs)
  }
  return top
}

const age = (file) => (existsSync(file) ? statSync(file).mtimeMs : 0)

/** Bundles the server, and the pages where there are any, when a source is newer than what was built. */
export async function ensureBuilt({ force = false, pages = true } = {}) {
  const main = at('dist', 'server', 'main.js')
  const manifest = Math.max(age(at('package-lock.json')), age(at('scripts', 'prepare.js')))
  if (force || Math.max(newest(at('server')), manifest) > age(main)) {
    const { build } = await import('esbuild')
    await build({
      entryPoints: [at('server', 'main.ts')],
      outfile: main,
      bundle: true,
      platform: 'node',
      target: 'node20',
      format: 'esm',
      packages: 'external',
      sourcemap: true,
      logLevel: 'error',
    })
  }
  const page = at('dist', 'web', 'index.html')
  if (
    pages &&
    existsSync(at('web', 'index.html')) &&
    (force || Math.max(newest(at('web')), newest(at('server', 'wire')), manifest) > age(page))
  ) {
    const { build } = await import('vite')
    await build({ configFile: at('web', 'vite.config.ts'), logLevel: 'error' })
  }
}
