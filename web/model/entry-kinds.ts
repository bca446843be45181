/** What people enter by hand, of what, and in which units. */
export const entryKinds = [
  { kind: 'Karl Fischer', text: 'Karl Fischer result', of: 'stream', units: ['ppm', 'mg/kg', '%'], does: 'It is the water of that feed from now on.' },
  { kind: 'titre', text: 'Titre', of: 'stream', units: ['mol/L', 'mmol/L'], does: 'An engineer takes it over as the concentration of the feed, under Settings.' },
  { kind: 'drum change', text: 'Drum change', of: 'stream', units: [], does: '' },
  { kind: 'filter change', text: 'Filter change', of: 'segment', units: [], does: 'A filter’s clean level is learnt anew from now on.' },
  { kind: 'effluent test', text: 'Effluent test', of: 'any', units: ['ppm', 'mg/kg', 'mg/L', '%', 'pH', 'mS/cm'], does: '' },
  { kind: 'sample', text: 'Sample taken', of: 'any', units: [], does: '' },
  { kind: 'comment', text: 'Comment on the run', of: 'none', units: [], does: '' },
] as const // biome-ignore format: a table
