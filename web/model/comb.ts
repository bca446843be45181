/** The last scans: one tooth a scan that came. Stands still when data stop, because only received scans move it. */
export const teeth = 30

/** True for each of the last 30 places on the grid, oldest first, that a scan came for. `scans` are start times, rising. */
export function combOf(scans: readonly number[], scanMs: number): boolean[] {
  const last = scans.at(-1)
  if (last === undefined || !(scanMs > 0)) return Array<boolean>(teeth).fill(false)
  const here = new Set(scans.map((t) => Math.round((last - t) / scanMs)))
  return Array.from({ length: teeth }, (_, i) => here.has(teeth - 1 - i))
}
