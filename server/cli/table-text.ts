/** A plain table: two spaces between columns, a rule under the head, numbers to the right. */
export function tableText(head: readonly string[], rows: readonly (readonly string[])[]): string {
  const width = head.map((h, i) => Math.max(h.length, ...rows.map((r) => (r[i] ?? '').length)))
  const isNumber = head.map((_, i) => rows.every((r) => /^[–\d.+*\s-]*$/.test(r[i] ?? '')))
  const line = (cells: readonly string[]) =>
    cells
      .map((c, i) => (i === cells.length - 1 && !isNumber[i] ? c : isNumber[i] ? c.padStart(width[i]!) : c.padEnd(width[i]!)))
      .join('  ')
      .trimEnd()
  return [line(head), width.map((w) => '─'.repeat(w)).join('  '), ...rows.map(line)].join('\n')
}
