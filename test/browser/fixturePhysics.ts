/**
 * Small physics, so that made-up figures have true shapes. It is the fixture's own: a screen must
 * not be checked against the room whose figures it shows.
 */

export type Liquid = { readonly Tf: number; readonly water: number }

const cpLiquid = 3.95
const cpFrozen = 3
const latent = 333

/** Ice per kg at equilibrium: freezing concentrates what is left, Tf·(1 − x)⁻¹-like. */
const iceAt = ({ Tf, water }: Liquid, T: number): number =>
  T >= Tf ? 0 : Tf >= -0.02 ? water * Math.min(1, (Tf - T) / 0.05) : water * (1 - Tf / T)

const hLiquid = ({ Tf }: Liquid, T: number): number => cpLiquid * (T - Tf)
const hFrozen = (liquid: Liquid, T: number): number =>
  T >= liquid.Tf ? hLiquid(liquid, T) : cpFrozen * (T - liquid.Tf) - latent * iceAt(liquid, T)

/** Bisection: 60 halvings of 90 K are far below a microkelvin. */
const inverse = (f: (T: number) => number, h: number): number => {
  let [low, high] = [-60, 30]
  for (let i = 0; i < 60; i += 1) {
    const middle = (low + high) / 2
    if (f(middle) < h) low = middle
    else high = middle
  }
  return (low + high) / 2
}

export const temperatureLiquid = (liquid: Liquid, h: number): number => h / cpLiquid + liquid.Tf
export const temperatureFrozen = (liquid: Liquid, h: number): number =>
  inverse((T) => hFrozen(liquid, T), h)

/** What the jump at equal heat leads to. */
export const jumpFrom = (liquid: Liquid, T: number): { end_C: number; ice: number } => {
  const end_C = temperatureFrozen(liquid, hLiquid(liquid, T))
  return { end_C, ice: iceAt(liquid, end_C) }
}

export const curvesOf = (liquid: Liquid) => {
  const steps = (from: number, to: number, by: number) =>
    Array.from({ length: Math.round((to - from) / by) + 1 }, (_, i) => from + i * by)
  const top = liquid.Tf + 8
  return {
    liquid: steps(liquid.Tf - 14, top, 0.25).map((T) => [hLiquid(liquid, T), T] as const),
    equilibrium: [
      ...steps(-20, liquid.Tf - 0.3, 0.25),
      ...steps(liquid.Tf - 0.3, liquid.Tf, 0.01),
      ...steps(liquid.Tf, top, 0.5),
    ].map((T) => [hFrozen(liquid, T), T] as const),
    hLiquid: (T: number) => hLiquid(liquid, T),
    hFrozen: (T: number) => hFrozen(liquid, T),
  }
}

export type Sample = { readonly t: number; readonly T: number; readonly ice: number }

/**
 * A lumped item that follows its air.
 *
 * @param tau    time constant, min
 * @param turns  minute at which ice nucleates; null never
 */
export const followAir = (
  liquid: Liquid,
  tau: number,
  air: (t: number) => number,
  start: { readonly T: number; readonly from: number; readonly until: number },
  turns: number | null,
): readonly Sample[] => {
  const dt = 0.5
  const out: Sample[] = []
  let h = hLiquid(liquid, start.T)
  let frozen = false
  for (let t = start.from; t <= start.until + 1e-9; t += dt) {
    if (turns !== null && t >= turns) frozen = true
    const T = frozen ? temperatureFrozen(liquid, h) : temperatureLiquid(liquid, h)
    out.push({ t, T, ice: frozen ? iceAt(liquid, T) : 0 })
    h -= (cpLiquid / tau) * (T - air(t)) * dt
  }
  return out
}

/** mulberry32: the same figures on every run. */
export const seeded = (seed: number) => {
  let state = seed | 0
  const next = (): number => {
    state = (state + 0x6d2b79f5) | 0
    let t = Math.imul(state ^ (state >>> 15), 1 | state)
    t = (t + Math.imul(t ^ (t >>> 7), 61 | t)) ^ t
    return ((t ^ (t >>> 14)) >>> 0) / 4294967296
  }
  return {
    next,
    gauss: () => Math.sqrt(-2 * Math.log(1 - next())) * Math.cos(2 * Math.PI * next()),
  }
}

/** Depth at which the chance of turning within an hour reaches `p`, K (negative). */
export const depthFor = (mass_kg: number, p: number): number =>
  -((-Math.log(1 - p) / (3.6 * mass_kg * 3e-8)) ** (1 / 12))

/** Chance of turning over `h` hours at a margin, K. */
export const chanceAt = (mass_kg: number, margin_K: number, h: number, factor: number): number =>
  margin_K >= 0 ? 0 : 1 - Math.exp(-3.6 * h * mass_kg * 3e-8 * factor * (-margin_K) ** 12)
