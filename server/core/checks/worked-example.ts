/** A published figure that the tool can recompute. */
export interface WorkedExample {
  readonly subject: string
  readonly name: string
  /** Where the figure is printed; "from memory" where it was not looked up. */
  readonly source: string
  readonly printed: number
  readonly unit: string
  /** Relative deviation that the figure's own digits and the source's accuracy allow. */
  readonly tolerance: number
  readonly compute: () => number
}

export interface CheckedExample {
  readonly example: WorkedExample
  readonly computed: number
  /** Computed over printed, less 1; of a printed 0 the plain difference. */
  readonly deviation: number
  readonly passed: boolean
}

/** Recomputes one figure and holds it to its tolerance. A result that is no number fails. */
export function checkExample(example: WorkedExample): CheckedExample {
  const computed = example.compute()
  const deviation = example.printed === 0 ? computed : computed / example.printed - 1
  return { example, computed, deviation, passed: Math.abs(deviation) <= example.tolerance }
}
