/** Small helpers over the DOM. Text goes in as text only; styles by class or custom property (the policy refuses style attributes). */

type Child = Node | string | null | undefined | false
export interface Attributes {
  readonly class?: string
  readonly text?: string | null
  readonly on?: Partial<{ [K in keyof HTMLElementEventMap]: (event: HTMLElementEventMap[K]) => void }>
  readonly [attribute: string]: unknown
}

export function el<K extends keyof HTMLElementTagNameMap>(
  tag: K,
  attributes: Attributes = {},
  ...children: readonly Child[]
): HTMLElementTagNameMap[K] {
  const node = document.createElement(tag)
  for (const [name, value] of Object.entries(attributes)) {
    if (value === null || value === undefined || value === false) continue
    if (name === 'class') node.className = String(value)
    else if (name === 'text') node.textContent = String(value)
    else if (name === 'on') for (const [type, run] of Object.entries(value as object)) node.addEventListener(type, run)
    else node.setAttribute(name, value === true ? '' : String(value))
  }
  append(node, children)
  return node
}

export function append(node: Node, children: readonly Child[]): void {
  for (const c of children)
    if (c !== null && c !== undefined && c !== false) node.appendChild(typeof c === 'string' ? document.createTextNode(c) : c)
}

/** Swaps all children; leaves the node alone when the same nodes are there already. */
export function fill(node: Element, ...children: readonly Child[]): void {
  node.replaceChildren()
  append(node, children)
}

/** Sets text only where it differs: a screen reader announces, and the browser lays out, only what changed. */
export function say(node: Element, text: string): void {
  if (node.textContent !== text) node.textContent = text
}

const svgNs = 'http://www.w3.org/2000/svg'
export function svg(
  tag: string,
  attributes: Readonly<Record<string, string | number>> = {},
  ...children: readonly Child[]
): SVGElement {
  const node = document.createElementNS(svgNs, tag)
  for (const [name, value] of Object.entries(attributes)) node.setAttribute(name, String(value))
  append(node, children)
  return node
}

/** A node placed by percent of its box, through custom properties. */
export function place<T extends HTMLElement | SVGElement>(node: T, at: { x?: number; y?: number; w?: number; h?: number }): T {
  for (const [name, value] of Object.entries(at)) node.style.setProperty(`--${name}`, `${Math.round(value * 1000) / 1000}%`)
  return node
}

/** `n things`, with the word in the right number. */
export const count = (n: number, one: string, many = `${one}s`): string => `${n} ${n === 1 ? one : many}`
