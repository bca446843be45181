/** Liquids a skid file may name, with the short names that are taken for them. Their properties live in core/fluids. */
export const solvents = {
  water: ['H2O'],
  tetrahydrofuran: ['THF'],
  '2-methyltetrahydrofuran': ['2-MeTHF', 'MeTHF'],
  toluene: ['PhMe'],
  hexane: ['n-hexane'],
  heptane: ['n-heptane'],
  cyclohexane: ['CyH'],
  methanol: ['MeOH'],
  ethanol: ['EtOH'],
  acetone: [],
  'methyl-tert-butyl-ether': ['MTBE', 'TBME'],
  'diethyl-ether': ['Et2O', 'ether'],
  dichloromethane: ['DCM', 'methylene chloride'],
  'ethyl-acetate': ['EtOAc'],
  acetonitrile: ['MeCN', 'ACN'],
  '1,4-dioxane': ['dioxane'],
  dimethylformamide: ['DMF', 'N,N-dimethylformamide'],
  dimethoxyethane: ['DME', '1,2-dimethoxyethane', 'glyme'],
} as const satisfies Record<string, readonly string[]>
export type SolventName = keyof typeof solvents

export const solventNames = Object.keys(solvents) as SolventName[]
/** Every name that is taken, full ones first. */
export const solventWords: readonly string[] = [...solventNames, ...Object.values(solvents).flat()]

const plain = (name: string): string => name.toLowerCase().replace(/[\s_-]+/g, '-')
const byWord = new Map<string, SolventName>(
  solventNames.flatMap((full) => [full, ...solvents[full]].map((word) => [plain(word), full] as const)),
)

/** The full name behind a full or short name, in any case and with blanks for hyphens; null for an unknown liquid. */
export const solventNamed = (name: string): SolventName | null => byWord.get(plain(name.trim())) ?? null
