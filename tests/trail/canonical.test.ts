import fc from 'fast-check'
import { describe, expect, it } from 'vitest'
import { canonical, wellFormed } from '../../server/trail/canonical.ts'

const anyJson = fc.jsonValue({ maxDepth: 4, stringUnit: 'binary' })

/** Numbers as RFC 8785 prints them in its appendix B, by their 64 bits. */
const numbers = [
  ['0000000000000000', '0'],
  ['8000000000000000', '0'],
  ['0000000000000001', '5e-324'],
  ['8000000000000001', '-5e-324'],
  ['7fefffffffffffff', '1.7976931348623157e+308'],
  ['ffefffffffffffff', '-1.7976931348623157e+308'],
  ['4340000000000000', '9007199254740992'],
  ['c340000000000000', '-9007199254740992'],
  ['4430000000000000', '295147905179352830000'],
  ['44b52d02c7e14af5', '9.999999999999997e+22'],
  ['44b52d02c7e14af6', '1e+23'],
  ['44b52d02c7e14af7', '1.0000000000000001e+23'],
  ['444b1ae4d6e2ef4e', '999999999999999700000'],
  ['444b1ae4d6e2ef4f', '999999999999999900000'],
  ['444b1ae4d6e2ef50', '1e+21'],
  ['3eb0c6f7a0b5ed8c', '9.999999999999997e-7'],
  ['3eb0c6f7a0b5ed8d', '0.000001'],
  ['41b3de4355555553', '333333333.3333332'],
  ['41b3de4355555554', '333333333.33333325'],
  ['41b3de4355555555', '333333333.3333333'],
  ['41b3de4355555556', '333333333.3333334'],
  ['41b3de4355555557', '333333333.33333343'],
  ['becbf647612f3696', '-0.0000033333333333333333'],
  ['43143ff3c1cb0959', '1424953923781206.2'],
] as const

const fromBits = (hex: string): number => Buffer.from(hex, 'hex').readDoubleBE()

// REC-10
describe('canonical JSON', () => {
  it('writes the numbers of RFC 8785, section 3.2.2.3, as printed', () => {
    expect(canonical(JSON.parse('[333333333.33333329, 1E30, 4.50, 2e-3, 1e-27]'))).toBe('[333333333.3333333,1e+30,4.5,0.002,1e-27]')
  })
  it.each(numbers)('writes the double %s as %s (RFC 8785, appendix B)', (hex, text) => {
    expect(canonical(fromBits(hex))).toBe(text)
  })
  it.each(['7fffffffffffffff', '7ff0000000000000', 'fff0000000000000'])('refuses the double %s (appendix B)', (hex) => {
    expect(() => canonical({ value: fromBits(hex) })).toThrow('no canonical JSON')
  })
  it('writes texts and literals as section 3.2.2 prints them', () => {
    const text = String.raw`{"numbers":[333333333.33333329,1E30,4.50,2e-3,0.000000000000000000000000001],
      "string":"\u20ac$\u000F\u000aA'\u0042\u0022\u005c\\\"\/","literals":[null,true,false]}`
    expect(canonical(JSON.parse(text))).toBe(
      String.raw`{"literals":[null,true,false],"numbers":[333333333.3333333,1e+30,4.5,0.002,1e-27],"string":"€$\u000f\nA'B\"\\\\\"/"}`,
    )
  })
  it('sorts members by UTF-16 code units: an emoji comes before U+FB33 (section 3.2.3)', () => {
    const names = ['\u20ac', '\r', '\ufb33', '1', '\ud83d\ude00', '\u0080', '\u00f6']
    const text = canonical(Object.fromEntries(names.map((name) => [name, 0])))
    expect([...text.matchAll(/("[^"]+"):0/g)].map((m) => JSON.parse(m[1]!))).toEqual([
      '\r', '1', '\u0080', '\u00f6', '\u20ac', '\ud83d\ude00', '\ufb33',
    ]) // biome-ignore format: a list
  })
  it('refuses lone surrogates in texts and names, and takes them once each is U+FFFD', () => {
    for (const bad of ['\ud800', 'a\udc00b', { '\ud83d': 1 }, ['\ude00\ud83d']]) {
      expect(() => canonical(bad)).toThrow('no canonical JSON')
      expect(canonical(wellFormed(bad))).toContain('\ufffd')
    }
    expect(wellFormed('a \ud83d\ude00')).toBe('a \ud83d\ude00')
  })
  it('is a fixed point: parsed and written again it is the same text, and it means the same', () => {
    fc.assert(
      fc.property(anyJson, (value) => {
        const clean = wellFormed(value)
        const text = canonical(clean)
        expect(canonical(JSON.parse(text))).toBe(text)
        expect(JSON.parse(text)).toEqual(JSON.parse(JSON.stringify(clean)))
        expect(text).not.toMatch(/^\s|\s$/)
      }),
      { numRuns: 500 },
    )
  })
  it('does not depend on the order in which members were set', () => {
    fc.assert(
      fc.property(fc.array(fc.tuple(fc.string({ unit: 'binary' }), fc.integer())), (pairs) => {
        const unique = [...new Map(pairs.map(([k, v]) => [wellFormed(k), v]))]
        expect(canonical(Object.fromEntries(unique.reverse()))).toBe(canonical(Object.fromEntries(unique)))
      }),
    )
  })
})
