/** True for a reagent named as an organolithium (…lithium, n-BuLi), not for an inorganic lithium salt. */
export const isOrganolithium = (name: string): boolean =>
  /lithium\b|[a-z]li$/i.test(name.trim()) && !/lithium (hydroxide|chloride|bromide|fluoride|carbonate)/i.test(name)
