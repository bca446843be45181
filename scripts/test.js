// npm test: lint, types, build, every test; the last line is `N passed, N failed, N skipped`.
import { spawnSync } from 'node:child_process'
import { existsSync, mkdirSync, readFileSync, rmSync } from 'node:fs'
import { networkInterfaces } from 'node:os'
import { join } from 'node:path'
import { ensureBuilt, ensureInstalled, root } from './prepare.js'

const at = (...parts) => join(root, ...parts)

function node(file, args) {
  return (
    spawnSync(process.execPath, [at(...file), ...args], { cwd: root, stdio: 'inherit', env: { TZ: 'UTC', ...process.env } })
      .status ?? 1
  )
}

const biome = ['node_modules', '@biomejs', 'biome', 'bin', 'biome']
const tsc = ['node_modules', 'typescript', 'bin', 'tsc']
const vitest = ['node_modules', 'vitest', 'vitest.mjs']

/** With the network cut off whole (a namespace of its own) even this machine cannot reach itself; the tests need that much. */
function ensureLoopback() {
  const up = Object.values(networkInterfaces()).some((list) => list?.some((a) => a.internal))
  if (up || process.platform !== 'linux') return
  if (spawnSync('ip', ['link', 'set', 'lo', 'up']).status !== 0)
    process.stdout.write('the loopback interface is down: tests that start a server will fail; `ip link set lo up` mends it\n')
}

/** Lint, types, build, tests. With arguments: only the test files they name. */
export async function test(args) {
  ensureInstalled()
  ensureLoopback()
  let failed = 0
  const step = (name, status) => {
    if (status === 0) return
    failed++
    process.stdout.write(`\n${name} failed\n`)
  }
  if (args.length === 0) {
    step('lint', node(biome, ['ci', '--colors=off', '.']))
    step('types', node(tsc, ['-p', '.']))
    if (existsSync(at('web', 'tsconfig.json'))) step('types of the pages', node(tsc, ['-p', 'web']))
  }
  await ensureBuilt()
  const counts = run('tests/vitest.config.ts', args)
  process.stdout.write(`\n${counts.passed} passed, ${counts.failed + failed} failed, ${counts.skipped} skipped\n`)
  process.exit(failed > 0 || counts.failed > 0 || !counts.ran ? 1 : 0)
}

/** The long counts. */
export async function soak(args) {
  ensureInstalled()
  await ensureBuilt()
  const counts = run('tests/soak/vitest.config.ts', args)
  process.stdout.write(`\n${counts.passed} passed, ${counts.failed} failed, ${counts.skipped} skipped\n`)
  process.exit(counts.failed > 0 || !counts.ran ? 1 : 0)
}

/** Speed and memory against the yardsticks; `--quick` looks in two minutes. Measures run in bundles of their own, as the product does. */
export async function bench(args) {
  ensureInstalled()
  const { build } = await import('esbuild')
  await build({
    entryPoints: [at('tests', 'bench', 'main.ts'), at('tests', 'bench', 'measures.ts')],
    outdir: at('dist', 'bench'),
    bundle: true,
    platform: 'node',
    target: 'node20',
    format: 'esm',
    packages: 'external',
    logLevel: 'error',
  })
  process.exit(node(['dist', 'bench', 'main.js'], args))
}

function run(config, args) {
  const out = at('dist', `${config.replaceAll('/', '-')}.json`)
  mkdirSync(at('dist'), { recursive: true })
  rmSync(out, { force: true })
  const status = node(vitest, [
    'run',
    '--config',
    config,
    '--reporter=default',
    '--reporter=json',
    `--outputFile.json=${out}`,
    ...args,
  ])
  if (!existsSync(out)) return { passed: 0, failed: 1, skipped: 0, ran: false }
  const r = JSON.parse(readFileSync(out, 'utf8'))
  // A file that does not load counts as one failure though it ran no test.
  const unloaded = r.testResults.filter(
    (f) => f.status === 'failed' && f.assertionResults.every((a) => a.status !== 'failed'),
  ).length
  const failed = r.numFailedTests + unloaded
  return {
    passed: r.numPassedTests,
    failed: failed === 0 && status !== 0 ? 1 : failed,
    skipped: r.numPendingTests + r.numTodoTests,
    ran: r.numTotalTests > 0,
  }
}
