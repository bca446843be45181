// node scripts ablate DIR: what each idea of the fouling verdict is worth, on runs whose truth is known (folders as for `score`).
import { join } from 'node:path'
import { pathToFileURL } from 'node:url'
import { root } from './prepare.js'

export async function ablate([dir, ...more]) {
  if (dir === undefined || more.length > 0) {
    process.stderr.write('ablate: one folder of cases, as for clearbore score\n')
    process.exit(2)
  }
  const { build } = await import('esbuild')
  const outfile = join(root, 'dist', 'ablation.js')
  await build({
    entryPoints: [join(root, 'server', 'score', 'ablation.ts')],
    outfile,
    bundle: true,
    platform: 'node',
    target: 'node20',
    format: 'esm',
    packages: 'external',
    logLevel: 'error',
  })
  const { ablation } = await import(pathToFileURL(outfile).href)
  const progress = (name) => process.stderr.write(`ablate: ${name}\n`)
  process.stdout.write(await ablation(dir, new AbortController().signal, progress))
}
