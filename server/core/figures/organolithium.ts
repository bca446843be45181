import type { StreamSpec } from '../skid.ts'

/** True for a name that says organolithium (…lithium, n-BuLi), not for an inorganic lithium salt. */
export const isOrganolithium = (name: string): boolean =>
  /lithium\b|[a-z]li$/i.test(name.trim()) && !/lithium (hydroxide|chloride|bromide|fluoride|carbonate)/i.test(name)

/** True for a feed whose reagent, or without one whose title, says organolithium. */
export const carriesOrganolithium = (stream: StreamSpec): boolean =>
  isOrganolithium(stream.reagent?.name ?? stream.title.replace(/ (feed|stream)$/i, ''))
