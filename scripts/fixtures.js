// node scripts fixtures: simulates the runs of fixtures/runs/runs.json anew, writes what the product says of them beside them, and puts
// the printed example into README.md. tests/replay/golden.test.ts holds all three to the byte, so a commit that moves verdicts carries them.
import { spawnSync } from 'node:child_process'
import { readFileSync, writeFileSync } from 'node:fs'
import { join } from 'node:path'
import { ensureBuilt, ensureInstalled, root } from './prepare.js'

/** Runs the command line of the build and gives its stdout. */
function clearbore(...args) {
  const { status, stdout } = spawnSync(process.execPath, [join(root, 'dist', 'server', 'main.js'), ...args], {
    cwd: root,
    encoding: 'utf8',
    stdio: ['ignore', 'pipe', 'inherit'],
    maxBuffer: 1 << 28,
  })
  if (status !== 0) process.exit(status ?? 1)
  return stdout
}

export async function fixtures() {
  ensureInstalled()
  await ensureBuilt({ pages: false })
  const readme = join(root, 'README.md')
  let text = readFileSync(readme, 'utf8')
  for (const { name, skid, simulate } of JSON.parse(readFileSync(join(root, 'fixtures', 'runs', 'runs.json'), 'utf8'))) {
    const log = `fixtures/runs/${name}`
    const skidFile = `fixtures/skids/${skid}.yaml`
    clearbore('simulate', '--skid', skidFile, ...simulate, '--out', `${log}.csv`, '--truth', `${log}.truth.json`)
    const command = ['analyse', `${log}.csv`, '--skid', skidFile]
    const printed = clearbore(...command, '--json', `${log}.expected.json`)
    const shown = `$ npx clearbore ${command.join(' ')}\n`
    const from = text.indexOf(shown)
    if (from >= 0) text = text.slice(0, from + shown.length) + printed + text.slice(text.indexOf('```', from))
  }
  writeFileSync(readme, text)
}
