import { Refusal } from '../../config/schema/refusal.js'

/**
 * How much water a solute holds at an osmolality, fitted to published freezing points:
 *
 *     1/m = k/π + β + γ π + δ π²      kg water per mol of solute
 *
 * Solutes add at equal water activity (Zdanovskii 1936; Stokes, Robinson 1966).
 */
export type Solute = {
  readonly name: string
  readonly aliases: readonly string[]
  /** Decides the default heat capacity of what is not water. */
  readonly class: 'salt' | 'glycol' | 'other'
  readonly molarMass_g_mol: number
  readonly k: number
  readonly beta: number
  readonly gamma: number
  readonly delta: number
  /** Mass % up to which the fit was made. */
  readonly to_massPercent: number
  /** Relative standard uncertainty of the osmolality within the fit. */
  readonly relU: number
}
export type SoluteTable = readonly Solute[]

/** One solute of a product: mol per kg of product, with its law and where that ends. */
export type Term = {
  readonly n_mol_kg: number
  readonly solute: Solute
  /** Osmolality at the end of the fit, osmol/kg. */
  readonly most_osmol_kg: number
}

const lawAt = (s: Solute, π: number): number => s.k / π + s.beta + π * (s.gamma + π * s.delta)

/** Osmolality at which the solute is as concentrated as the fit reaches. */
export function fitEnd_osmol_kg(s: Solute): number {
  const w = s.to_massPercent / 100
  const waterPerMol_kg = ((1 - w) / w) * (s.molarMass_g_mol / 1000)
  let low = 1e-3
  let high = 30
  for (let i = 0; i < 60; i++) {
    const middle = (low + high) / 2
    if (lawAt(s, middle) > waterPerMol_kg) low = middle
    else high = middle
  }
  return high
}

/**
 * Water that one mole of a solute holds at an osmolality. Beyond the end of its fit the law is
 * carried on as π_max/π, which keeps ice from ever decreasing as it gets colder (rulings.md 9).
 *
 * @param π  osmol/kg, above 0
 * @returns  kg water per mol
 * @source   physics.md §3.5: fits to CRC Handbook "Concentrative properties" (Wolf 1966)
 */
export function waterPerMol_kg({ solute, most_osmol_kg }: Term, π: number): number {
  return π <= most_osmol_kg ? lawAt(solute, π) : (lawAt(solute, most_osmol_kg) * most_osmol_kg) / π
}

/** The solute of a name or alias. @throws Refusal 'unknown-solute' with the nearest known names */
export function soluteOf(name: string, table: SoluteTable, field: string): Solute {
  const key = name.trim().toLowerCase()
  const found = table.find(
    (s) => s.name.toLowerCase() === key || s.aliases.some((a) => a.toLowerCase() === key),
  )
  if (found !== undefined) return found
  throw new Refusal(
    'unknown-solute',
    field,
    name,
    'this solute is not in the table',
    `known: ${table.map((s) => s.name).join(', ')}; or give the osmolality instead`,
  )
}

/** Terms of a product's solutes, kg per kg of product each. */
export function termsOf(
  solutes: readonly { readonly name: string; readonly kg_kg: number }[],
  table: SoluteTable,
): Term[] {
  return solutes
    .map(({ name, kg_kg }, i) => ({
      solute: soluteOf(name, table, `freezing.solutes[${i}].name`),
      kg_kg,
    }))
    .filter(({ kg_kg }) => kg_kg > 0)
    .map(({ solute, kg_kg }) => ({
      n_mol_kg: kg_kg / (solute.molarMass_g_mol / 1000),
      solute,
      most_osmol_kg: fitEnd_osmol_kg(solute),
    }))
}
