import { timeParser } from './time-parse.ts'

const datePattern =
  /^(\d{1,4})([/.-])(\d{1,2})\2(\d{4}|\d{1,2})([ T,]+)(\d{1,2})([:.])(\d\d)(?:\7(\d\d)(?:([.,:])(\d+))?)?(\s*)([AaPp][Mm])?$/
const encoder = new TextEncoder()

/** True where the format reads the text. */
export function reads(format: string, text: string): boolean {
  const bytes = encoder.encode(text)
  return !Number.isNaN(timeParser(format).parse(bytes, 0, bytes.length))
}

/** Formats that could have written this one text, likeliest first; several where day, month and short year may stand in another order. */
export function formatsOf(text: string): string[] {
  if (reads('iso', text)) return ['iso']
  if (/^(19|20)\d{12}$/.test(text)) return reads('yyyyMMddHHmmss', text) ? ['yyyyMMddHHmmss'] : []
  if (/^[+-]?\d+([.,]\d*)?([eE][+-]?\d+)?$/.test(text)) {
    const n = Number(text.replace(',', '.'))
    return [Math.abs(n) < 1e8 ? 'elapsed-s' : n < 1e11 ? 'epoch-s' : 'epoch-ms'].filter((f) => reads(f, text))
  }
  if (reads('time-of-day', text)) return ['time-of-day']
  const m = datePattern.exec(text)
  if (m === null) return []
  const [, a = '', mark, b = '', c = '', gap = ' ', h = '', colon = ':', , second, dot, fraction, blank = '', half] = m
  const clock = `${half ? 'h' : 'H'}${h.length > 1 ? (half ? 'h' : 'H') : ''}${colon}mm${second ? `${colon}ss` : ''}${dot ? `${dot}${'S'.repeat(fraction!.length)}` : ''}${half ? `${blank}a` : ''}`
  const two = (letter: string, text: string): string => letter.repeat(Math.min(2, text.length))
  const join = (...parts: string[]): string => `${parts.join(mark)}${gap}${clock}`
  if (a.length === 4) return [join('yyyy', two('M', b), two('d', c))].filter((f) => reads(f, text))
  const year = c.length === 4 ? 'yyyy' : 'yy'
  const dayFirst = join(two('d', a), two('M', b), year)
  // Dates with dots are written day first wherever they are in use (DIN 1355-1 and its neighbours; common practice).
  const orders = mark === '.' ? [dayFirst] : [dayFirst, join(two('M', a), two('d', b), year)]
  if (mark !== '.' && year === 'yy' && a.length === 2) orders.push(join('yy', two('M', b), two('d', c)))
  return orders.filter((f) => reads(f, text))
}

/** What the first rows' times say: one format, several that cannot be told apart, or none that reads the first of them. */
export function detectFormat(texts: readonly string[]): { formats: string[] } {
  const first = texts.find((t) => formatsOf(t).length > 0)
  if (first === undefined) return { formats: [] }
  let open = formatsOf(first)
  for (const text of texts) {
    if (open.length < 2) break
    const fit = open.filter((f) => reads(f, text))
    // A row that neither reads is broken or of another format: it decides nothing.
    if (fit.length > 0) open = fit
  }
  return { formats: open }
}
