import { Refusal } from '../../config/schema/refusal.js'

/** One row of config/library/solutes.json. */
export type Solute = {
  readonly name: string
  readonly aliases: readonly string[]
  readonly molarMass_kg_mol: number
  /** 1/m = k/π + β + γπ + δπ², kg of water per mol at osmolality π. */
  readonly k: number
  readonly beta: number
  readonly gamma: number
  readonly delta: number
  /** The fit holds up to this mass fraction of the solute alone in water. */
  readonly fittedTo_kg_kg: number
  readonly otherCp_kJ_kgK: number
}

/** The solute table as it is shipped; the caller reads it. */
export type SoluteTable = { readonly solutes: readonly Solute[] }

/**
 * Liquid water that a kilogram of product holds at osmolality π, on one range of π:
 *
 *     w_liq(π) = N/π + B + Gπ + Dπ²      kg per kg of product
 */
export type WaterDemand = {
  /** This piece holds up to here; the last one without end. */
  readonly to_osmol_kg: number
  readonly N: number
  readonly B: number
  readonly G: number
  readonly D: number
}

/** Liquid water at an osmolality, kg per kg of product. */
export function liquidWater_kg_kg(pieces: readonly WaterDemand[], π: number): number {
  const p = pieceAt(pieces, π)
  return p.N / π + p.B + π * (p.G + π * p.D)
}

/** d w_liq/dπ: never above 0 in a checked table. */
export function liquidWaterSlope(pieces: readonly WaterDemand[], π: number): number {
  const p = pieceAt(pieces, π)
  return -p.N / (π * π) + p.G + 2 * π * p.D
}

function pieceAt(pieces: readonly WaterDemand[], π: number): WaterDemand {
  let i = 0
  while (i < pieces.length - 1 && π > pieces[i]!.to_osmol_kg) i++
  return pieces[i]!
}

/** Water per mol of a solute at an osmolality within its fit. */
const waterPerMol = (s: Solute, π: number): number => s.k / π + s.beta + π * (s.gamma + π * s.delta)

/**
 * The osmolality at which the fit of a solute ends: that of its strongest fitted solution.
 *
 *     1/m(π_max) = 1/m_max      m_max = w/(M (1 − w))
 */
export function fitEnd_osmol_kg(s: Solute): number {
  const demand = (s.molarMass_kg_mol * (1 - s.fittedTo_kg_kg)) / s.fittedTo_kg_kg
  // Demand falls with π over the fit (a test holds every row to it): halve what brackets it.
  let low = 0
  let high = 40
  for (let k = 0; k < 80; k++) {
    const middle = (low + high) / 2
    if (waterPerMol(s, middle) > demand) low = middle
    else high = middle
  }
  return (low + high) / 2
}

/** Subscripts, spaces and case do not tell solutes apart: "CaCl₂", "cacl2". */
const plain = (name: string): string =>
  name
    .trim()
    .toLowerCase()
    .replace(/[₀-₉]/g, (digit) => String(digit.charCodeAt(0) - 0x2080))
    .replace(/[\s·•*_-]+/g, ' ')

const pairsOf = (word: string): Set<string> =>
  new Set(Array.from({ length: Math.max(0, word.length - 1) }, (_, i) => word.slice(i, i + 2)))

/** How alike two words are: the share of neighbouring letters they have in common (Dice 1945). */
const likeness = (a: string, b: string): number => {
  const [p, q] = [pairsOf(a), pairsOf(b)]
  const common = [...p].filter((pair) => q.has(pair)).length
  return p.size + q.size === 0 ? 0 : (2 * common) / (p.size + q.size)
}

/** Names in the table that are most like a word that is not in it, best first. */
export function nearestSolutes(table: SoluteTable, word: string): string[] {
  const asked = plain(word)
  return table.solutes
    .map((s) => ({
      name: s.name,
      like: Math.max(...[s.name, ...s.aliases].map((known) => likeness(asked, known))),
    }))
    .sort((a, b) => b.like - a.like)
    .slice(0, 3)
    .map(({ name }) => name)
}

/**
 * A solute by its name or by a formula that only one solute has.
 *
 * @param at  the sender's own path to the name
 * @throws    Refusal 'unknown-solute' with the nearest names, 'ambiguous-solute' for a formula
 *            that several share
 */
export function soluteOf(table: SoluteTable, name: string, at: string): Solute {
  const asked = plain(name)
  const byName = table.solutes.find((s) => s.name === asked)
  if (byName !== undefined) return byName
  const byAlias = table.solutes.filter((s) => s.aliases.includes(asked))
  if (byAlias.length === 1) return byAlias[0]!
  if (byAlias.length > 1)
    throw new Refusal(
      'ambiguous-solute',
      at,
      name,
      'several solutes have this formula',
      `give one of ${byAlias.map((s) => `"${s.name}"`).join(', ')}`,
    )
  throw new Refusal(
    'unknown-solute',
    at,
    name,
    'there is no such solute in the table',
    `nearest: ${nearestSolutes(table, name)
      .map((known) => `"${known}"`)
      .join(', ')}; an osmolality or a measured freezing point can be given instead`,
  )
}

/** A solution as its water demand, and what goes with it. */
export type Solution = {
  readonly water_kg_kg: number
  readonly pieces: readonly WaterDemand[]
  /** Mass mean over the solutes. */
  readonly otherCp_kJ_kgK: number
  /** Above this osmolality the fit of at least one solute has ended. */
  readonly fitEnd_osmol_kg: number
}

/**
 * Water demand of a mixture: solutes at equal water activity each claim the water they would claim
 * alone (Zdanovskii–Stokes–Robinson).
 *
 *     N = Σ n k    B = Σ n β    G = Σ n γ    D = Σ n δ       n in mol per kg of product
 *
 * Beyond its fit a solute is taken as ideal from there on, 1/m(π) = 1/m(π_max)·π_max/π: its whole
 * demand moves into N, which keeps demand continuous, positive and falling.
 *
 * @param solutes  kg of each per kg of product; the rest is water
 * @param at       the sender's own path to the list
 * @throws         Refusal for an unknown solute, 'no-solute' where all amounts are 0
 * @source         coefficients in config/library/solutes.json; mixtures: Rowland and May 2012
 */
export function solutionOf(
  solutes: readonly { readonly name: string; readonly kg_kg: number }[],
  table: SoluteTable,
  at: string,
): Solution {
  const parts = solutes.map((given, i) => {
    const solute = soluteOf(table, given.name, `${at}[${i}].name`)
    const end = fitEnd_osmol_kg(solute)
    return {
      solute,
      kg_kg: given.kg_kg,
      n: given.kg_kg / solute.molarMass_kg_mol,
      end,
      ideal: waterPerMol(solute, end) * end,
    }
  })
  const dissolved = parts.reduce((sum, p) => sum + p.kg_kg, 0)
  const present = parts.filter((p) => p.n > 0)
  if (!(dissolved > 0))
    throw new Refusal(
      'no-solute',
      at,
      solutes,
      'all amounts are 0',
      'give what is dissolved, or the kind "water"',
    )
  const ends = [...new Set(present.map((p) => p.end))].sort((a, b) => a - b)
  const pieces = [...ends, Number.POSITIVE_INFINITY].map((to): WaterDemand => {
    const inside = present.filter((p) => p.end >= to)
    const beyond = present.filter((p) => p.end < to)
    const sum = (of: (s: Solute) => number) =>
      inside.reduce((all, p) => all + p.n * of(p.solute), 0)
    return {
      to_osmol_kg: to,
      N: sum((s) => s.k) + beyond.reduce((all, p) => all + p.n * p.ideal, 0),
      B: sum((s) => s.beta),
      G: sum((s) => s.gamma),
      D: sum((s) => s.delta),
    }
  })
  return {
    water_kg_kg: 1 - dissolved,
    pieces,
    otherCp_kJ_kgK:
      parts.reduce((all, p) => all + p.kg_kg * p.solute.otherCp_kJ_kgK, 0) / dissolved,
    fitEnd_osmol_kg: ends[0] ?? Number.POSITIVE_INFINITY,
  }
}
