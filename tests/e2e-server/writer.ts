import { appendFileSync, readFileSync, renameSync, writeFileSync } from 'node:fs'
import { demoScenario } from '../../server/core/sim/demo.ts'
import { logText } from '../../server/core/sim/log-text.ts'
import { loadSkid } from '../../server/skid/check.ts'

// A data logger: FILE SKID ROWS ROTATE_AT. Appends the demo's log in pieces that end anywhere, and rotates once.
const [file = '', skidFile = '', rows = '0', rotateAt = '0'] = process.argv.slice(2)
const skid = loadSkid(readFileSync(skidFile, 'utf8'), skidFile)
const lines = logText(skid, demoScenario(skid)).lines()
const header = lines.next().value ?? ''
writeFileSync(file, header)
let held = ''
const write = (text: string): void => appendFileSync(file, text)
for (let i = 0; i < Number(rows); i++) {
  held += lines.next().value ?? ''
  if (i % 7 === 3) {
    const cut = Math.floor(held.length * 0.6)
    write(held.slice(0, cut))
    held = held.slice(cut)
    await new Promise((done) => setTimeout(done, 4))
  }
  if (i + 1 === Number(rotateAt)) {
    write(held)
    held = ''
    renameSync(file, `${file}.1`)
    writeFileSync(file, header)
  }
}
write(held)
process.stdout.write('written\n')
