/** A cell as RFC 4180 has it. Text that a spreadsheet would take for a formula gets an apostrophe in front; numbers never do. */
export function csvCell(value: string | number | null): string {
  if (value === null) return ''
  if (typeof value === 'number') return Object.is(value, -0) ? '-0' : String(value)
  return quoted(/^[=+\-@\t\r]/.test(value) ? `'${value}` : value)
}

export const quoted = (text: string): string => (/[",\n\r]|^\s|\s$/.test(text) ? `"${text.replaceAll('"', '""')}"` : text)
export const csvLine = (cells: readonly (string | number | null)[]): string => `${cells.map(csvCell).join(',')}\r\n`
