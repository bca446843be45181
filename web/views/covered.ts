let watching = false

/** Keeps `--strip-h` and `--foot-h` at the heights that the strip and the foot have now: what sticks below the strip, and what scrolls into view, must know. */
export function watchCovered(): void {
  if (watching) return
  watching = true
  const measure = new ResizeObserver((entries) => {
    for (const { target } of entries) {
      const name = target.classList.contains('strip') ? '--strip-h' : '--foot-h'
      document.documentElement.style.setProperty(name, `${(target as HTMLElement).offsetHeight}px`)
    }
  })
  for (const selector of ['.strip', '.foot']) {
    const node = document.querySelector(selector)
    if (node !== null) measure.observe(node)
  }
}

/** The part of the window in which a row is not covered: below the strip, what sticks to it and the rows pinned before it, above the foot. */
export function uncovered(row: Element): readonly [topPx: number, bottomPx: number] {
  const above = [document.querySelector('.strip'), document.querySelector('.person > .answer')]
  for (const pinned of document.querySelectorAll('.alarms > .pinned'))
    if (!pinned.contains(row) && pinned.compareDocumentPosition(row) & Node.DOCUMENT_POSITION_FOLLOWING) above.push(pinned)
  const top = Math.max(0, ...above.map((e) => e?.getBoundingClientRect().bottom ?? 0))
  return [top, document.querySelector('.foot')?.getBoundingClientRect().top ?? window.innerHeight]
}
