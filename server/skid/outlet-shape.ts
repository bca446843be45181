import { isScalar } from 'yaml'
import { number, type Reader, text } from './readers.ts'
import { isPlain } from './walk.ts'

export type Outlet = { readonly tag: string } | { readonly bar: number } | 'ambient'

const says = "a tag, a number of bar, or 'ambient'"
const held = number({ min: -1.02, max: 10_000, unit: 'bar gauge' })
const word = text(says)

/** `pressureOut`: a bare number is a held pressure, `ambient` is 0 bar gauge, any other word (or a number in quotes) a tag. */
export const outletShape: Reader<Outlet> = {
  says,
  read(at, path, walk) {
    const node = walk.real(at)
    if (isScalar(node) && isPlain(node) && typeof node.value === 'number') {
      const bar = held.read(node, path, walk)
      return bar === undefined ? undefined : { bar }
    }
    const value = word.read(at, path, walk)
    if (value === undefined) return undefined
    if (!/^(ambient|atmosphere|atmospheric)$/i.test(value)) return { tag: value }
    if (value !== 'ambient') walk.say(path, `pressureOut is '${value}'`, says, "write 'ambient'")
    return 'ambient'
  },
}
