/**
 * A stored item for the score, on purpose not the watch's lumped model: six shells, a wall, its own
 * simple curves. It shares no code with server/.
 */

export type Stuff = {
  readonly freezing_C: number
  readonly water_kg_kg: number
  readonly bound_kg_kg: number
  readonly other_cp: number
}

const shells = 6
const latent_kJ_kg = (t: number): number => 333.4 + 2.1 * Math.max(-40, Math.min(0, t))
const cpWater = 4.22

const cpLiquid = (s: Stuff): number => s.water_kg_kg * cpWater + (1 - s.water_kg_kg) * s.other_cp

/** Ice by the hyperbola of an ideal solution (Chen 1985; Miles 1983). */
const iceAt = (s: Stuff, t: number): number =>
  t >= s.freezing_C
    ? 0
    : (s.water_kg_kg - s.bound_kg_kg) * (1 - Math.min(-1e-4, s.freezing_C) / Math.min(t, -1e-4))

/** Temperature with ice from enthalpy, as a table: h from −420 to 0 kJ/kg over the liquid at Tf. */
const tableOf = (s: Stuff): ((h: number) => number) => {
  const at = (t: number) => cpLiquid(s) * t - iceAt(s, t) * latent_kJ_kg(t)
  const top = cpLiquid(s) * s.freezing_C
  const n = 4000
  const T = new Float64Array(n + 1)
  for (let i = 0; i <= n; i++) {
    const h = top - (420 * i) / n
    let [low, high] = [-80, s.freezing_C]
    for (let k = 0; k < 50; k++) {
      const m = (low + high) / 2
      if (at(m) < h) low = m
      else high = m
    }
    T[i] = (low + high) / 2
  }
  return (h) => {
    if (h >= top) return h / cpLiquid(s)
    const x = Math.min(n - 1e-6, ((top - h) / 420) * n)
    const i = Math.floor(x)
    return T[i]! + (x - i) * (T[i + 1]! - T[i]!)
  }
}

export type Body = {
  /** One step in air of a temperature; the state is inside. */
  step(air_C: number, dt_s: number): void
  turn(): void
  readonly mean_C: () => number
  readonly centre_C: () => number
  readonly wall_C: () => number
  readonly ice: () => number
  readonly isIce: () => boolean
}

/**
 * @param radius_m   of a body taken as a long cylinder
 * @param UA_W_K     film between wall and air
 * @param placed     as ice where true
 */
export const bodyOf = (
  stuff: Stuff,
  fill_kg: number,
  wall_kJ_K: number,
  UA_W_K: number,
  radius_m: number,
  start_C: number,
  placed: boolean,
): Body => {
  const withIce = tableOf(stuff)
  const cl = cpLiquid(stuff)
  let ice = placed
  const coldStart = (t: number) => cl * t - iceAt(stuff, t) * latent_kJ_kg(t)
  const h = new Float64Array(shells).fill(placed ? coldStart(start_C) : cl * start_C)
  let wall = start_C
  const mass = new Float64Array(shells)
  const link = new Float64Array(shells)
  const height = fill_kg / 1000 / (Math.PI * radius_m ** 2)
  const edge = (i: number) => (radius_m * i) / shells
  for (let i = 0; i < shells; i++) {
    mass[i] = (fill_kg * (edge(i + 1) ** 2 - edge(i) ** 2)) / radius_m ** 2
    // Conductivity a little over still water: weak convection. Between middles of shells.
    link[i] = (2 * Math.PI * edge(i + 1) * height * 0.75) / (radius_m / shells)
  }
  const toWall = link[shells - 1]! * 2
  const T = new Float64Array(shells)
  const read = () => {
    for (let i = 0; i < shells; i++) T[i] = ice ? withIce(h[i]!) : h[i]! / cl
  }
  read()
  const meanH = () => h.reduce((s, x, i) => s + x * mass[i]!, 0) / fill_kg
  return {
    step(air_C, dt_s) {
      const parts = Math.max(1, Math.ceil(dt_s / 2))
      const d = dt_s / parts
      for (let k = 0; k < parts; k++) {
        const wallFlux = toWall * (T[shells - 1]! - wall)
        for (let i = 0; i < shells; i++) {
          const inward = i === 0 ? 0 : link[i - 1]! * (T[i - 1]! - T[i]!)
          const outward = i === shells - 1 ? wallFlux : link[i]! * (T[i]! - T[i + 1]!)
          h[i] = h[i]! + ((inward - outward) * d) / 1000 / mass[i]!
        }
        // The thin wall is solved implicitly: its own time constant is shorter than a step.
        const C = (wall_kJ_K * 1000) / d
        wall = (C * wall + toWall * T[shells - 1]! + UA_W_K * air_C) / (C + toWall + UA_W_K)
        read()
      }
      if (ice && h.every((x) => x > cl * stuff.freezing_C + 0.5)) ice = false
    },
    turn() {
      ice = true
      read()
    },
    mean_C: () => T.reduce((s, x, i) => s + x * mass[i]!, 0) / fill_kg,
    centre_C: () => (T[0]! + T[1]! + T[2]!) / 3,
    wall_C: () => wall,
    ice: () =>
      ice ? Math.max(0, (cl * withIce(meanH()) - meanH()) / latent_kJ_kg(withIce(meanH()))) : 0,
    isIce: () => ice,
  }
}
