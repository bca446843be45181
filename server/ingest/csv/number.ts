/** Powers of ten that a double holds exactly. */
export const exactPowers: Float64Array = Float64Array.from({ length: 23 }, (_, i) => Number(`1e${i}`))

/** Integers below this are exact in a double, whatever order their digits were added in. */
export const exactMantissa = 2 ** 53

const latin = new TextDecoder('windows-1252')

/**
 * The decimal number in `bytes[from, to)`, times 10^`scale`; null where the text is no decimal number. Digits with at most one
 * decimal sign (`point`, a byte) and an exponent; blanks around are allowed, signs too; no thousands marks, no hexadecimal.
 *
 * Bit-identical to `Number(text)` for scale 0: a mantissa below 2^53 and a power of ten up to 10^22 are exact, so one
 * multiplication or division rounds once (W. D. Clinger, PLDI 1990, the fast path); everything else goes through `Number`.
 * May give an infinity (an overflow), which the caller judges.
 */
export function decimalNumber(bytes: Uint8Array, from: number, to: number, point: number, scale = 0): number | null {
  let p = from
  let end = to
  while (p < end && bytes[p]! <= 32) p++
  while (end > p && bytes[end - 1]! <= 32) end--
  const start = p
  const sign = bytes[p]
  if (p < end && (sign === 45 || sign === 43)) p++
  let mantissa = 0
  let digits = 0
  let decimals = 0
  let pointAt = -1
  for (; p < end; p++) {
    const b = bytes[p]!
    if (b >= 48 && b <= 57) {
      mantissa = mantissa * 10 + (b - 48)
      digits++
      if (pointAt >= 0) decimals++
    } else if (b === point && pointAt < 0) pointAt = p
    else break
  }
  if (digits === 0) return null
  let exponent = 0
  if (p < end) {
    if (bytes[p] !== 101 && bytes[p] !== 69) return null
    p++
    const minus = bytes[p] === 45
    if (p < end && (minus || bytes[p] === 43)) p++
    const first = p
    for (; p < end; p++) {
      const b = bytes[p]!
      if (b < 48 || b > 57) return null
      exponent = Math.min(exponent * 10 + (b - 48), 99_999)
    }
    if (p === first) return null
    if (minus) exponent = -exponent
  }
  const ten = exponent - decimals + scale
  if (mantissa < exactMantissa && ten >= -22 && ten <= 22) {
    const value = ten < 0 ? mantissa / exactPowers[-ten]! : mantissa * exactPowers[ten]!
    return sign === 45 ? -value : value
  }
  const text = latin.decode(bytes.subarray(start, end))
  return Number(point === 46 ? text : text.replace(String.fromCharCode(point), '.')) * 10 ** scale
}
