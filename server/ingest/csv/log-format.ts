import type { LogFormat, Skid } from '../../core/skid.ts'

const plain: LogFormat = { files: null, time: null, timeFormat: [], missing: [], clockOffsetSeconds: 0 }

/** How the logger that wrote this file writes: the first entry whose pattern fits the file's name, else the first without a pattern. */
export function logFormatOf(skid: Skid, name: string): LogFormat {
  const base = name.split(/[\\/]/).at(-1)!
  return skid.log.find((f) => f.files !== null && globFits(f.files, base)) ?? skid.log.find((f) => f.files === null) ?? plain
}

/** `*` any run of characters, `?` any one; everything else as it stands. */
export function globFits(glob: string, name: string): boolean {
  const pattern = glob
    .split(/[\\/]/)
    .at(-1)!
    .replace(/[.+^${}()|[\]\\]/g, '\\$&')
    .replaceAll('*', '.*')
    .replaceAll('?', '.')
  return new RegExp(`^${pattern}$`, 's').test(name)
}
