import { readLibrary } from '../../config/library/read.js'
import { readSite } from '../../config/schema/readSite.js'
import type { Verdict } from '../../config/schema/verdict.js'
import { judge } from '../../server/commands/judge.js'
import { planOf } from '../../server/watch/plan.js'
import type { Case } from './traces.js'

/** What the watch made of one trace. */
export type Scored = {
  readonly name: string
  readonly row: string
  /** A turn that was there and to be seen. */
  readonly turn: boolean
  readonly found: boolean
  readonly late_s: number | null
  readonly falsely: boolean
  readonly coversTime: boolean
  /** Grid points at which an estimate was given, and those with the truth inside ±1.645 u. */
  readonly points: number
  readonly inside: number
  readonly aboveWhileBelow: number
  readonly below: readonly (readonly [p: number, truth: boolean])[]
  readonly silentPoints: number
  readonly silentRight: number
  readonly silentWrong: number
  readonly itemHours: number
  readonly worst_z: number
  readonly phases: readonly [right: number, of: number]
}

/** A jump this far over the noise within the reach of the probe is to be seen. */
const toBeSeen = (c: Case): boolean =>
  c.truth.turned_s !== null &&
  c.truth.jump_K > 1 &&
  c.placement !== 'in-air' &&
  c.placement !== 'in-buffer'

export const verdictsOf = async (
  c: Case,
  lines: readonly string[] = c.lines,
): Promise<Verdict[]> => {
  const plan = planOf(readSite(c.site), readLibrary())
  const out: Verdict[] = []
  await judge({
    plan,
    lines,
    every_ms: c.truth.every_s * 1000,
    until_ms: c.until_ms,
    say: (key) => key,
    write: (v) => {
      if ('standing' in v) out.push(v)
    },
  })
  return out
}

export const score = async (c: Case): Promise<Scored> => {
  const all = await verdictsOf(c)
  const { truth } = c
  const sinceStart = (t: string) => (Date.parse(t) - c.start_ms) / 1000
  const call = all.find((v) => v.standing === 'Turned' && !v.turned.reckoned)
  const called_s = call === undefined ? null : sinceStart(call.t)
  const turned = truth.turned_s
  let points = 0
  let inside = 0
  let aboveWhileBelow = 0
  let silentPoints = 0
  let silentRight = 0
  let silentWrong = 0
  let worst = 0
  let right = 0
  let of = 0
  const below: [number, boolean][] = []
  const seen = new Set<number>()
  for (const v of all) {
    const s = sinceStart(v.t)
    if (s % truth.every_s !== 0 || seen.has(s)) continue
    seen.add(s)
    const k = s / truth.every_s
    const T = truth.T_C[k]
    if (T === undefined) continue
    const isSilent = truth.silent.some(([a, b]) => s >= a && s <= b)
    const nearSilent = truth.silent.some(([a, b]) => s >= a - 1200 && s <= b + 1200)
    if (isSilent) {
      silentPoints++
      if (v.standing === 'Silent' || v.standing === 'Turned') silentRight++
      continue
    }
    if (v.standing === 'Silent' && !nearSilent && s > 1800) silentWrong++
    if (v.temperature_C === null || v.u_K === null || v.standing === 'Silent') continue
    points++
    const z = Math.abs(v.temperature_C - T) / v.u_K
    if (z <= 1.645) inside++
    if (z > Math.abs(worst)) worst = z
    const isBelow = T < truth.freezing_C
    if (v.belowProbability !== null) below.push([v.belowProbability, isBelow])
    if (v.standing === 'Above' && T < truth.freezing_C - 2 * Math.hypot(v.u_K, v.freezingPoint_u_K))
      aboveWhileBelow++
    const ice = truth.ice[k] ?? 0
    const phase = ice > 0 ? 'ice' : isBelow ? 'supercooled' : 'liquid'
    const said = ['freezing', 'frozen', 'thawing'].includes(v.phase) ? 'ice' : v.phase
    of++
    if (said === phase) right++
  }
  const inTime =
    called_s !== null &&
    turned !== null &&
    called_s >= turned &&
    called_s - turned <= truth.tolerance_s
  const everIce = (s: number) => truth.startsFrozen || (turned !== null && turned <= s)
  const last = all.findLast((v) => v.turned.earliest !== null)
  return {
    name: c.name,
    row:
      c.placement === 'on-item-wall'
        ? c.withAir
          ? 'wall+air'
          : 'wall'
        : c.placement === 'in-buffer' || c.placement === 'in-air'
          ? 'air or buffer'
          : c.withAir
            ? 'in item+air'
            : 'in item',
    turn: toBeSeen(c),
    found: inTime,
    late_s: called_s !== null && turned !== null ? called_s - turned : null,
    falsely: called_s !== null && !everIce(called_s),
    coversTime:
      last !== undefined &&
      turned !== null &&
      sinceStart(last.turned.earliest!) - 1 <= turned &&
      turned <= sinceStart(last.turned.latest!) + 1,
    points,
    inside,
    aboveWhileBelow,
    below,
    silentPoints,
    silentRight,
    silentWrong,
    itemHours: c.hours,
    worst_z: worst,
    phases: [right, of],
  }
}

/** Expected calibration error of P(below) over ten bins. */
const calibrationError = (pairs: readonly (readonly [number, boolean])[]): number => {
  let error = 0
  for (let b = 0; b < 10; b++) {
    const inBin = pairs.filter(([p]) => Math.min(9, Math.floor(p * 10)) === b)
    if (inBin.length === 0) continue
    const mean = inBin.reduce((s, [p]) => s + p, 0) / inBin.length
    const rate = inBin.filter(([, y]) => y).length / inBin.length
    error += (inBin.length / pairs.length) * Math.abs(mean - rate)
  }
  return error
}

/** The figures of issue and sheet, over many traces of one row or all. */
export const tableOf = (all: readonly Scored[]) => {
  const rows = [...new Set(all.map((s) => s.row)), 'all']
  return rows.map((row) => {
    const own = row === 'all' ? all : all.filter((s) => s.row === row)
    const turns = own.filter((s) => s.turn)
    const found = turns.filter((s) => s.found).length
    const falsely = own.filter((s) => s.falsely).length
    const called = own.filter((s) => s.late_s !== null || s.falsely)
    const sum = (f: (s: Scored) => number) => own.reduce((n, s) => n + f(s), 0)
    return {
      row,
      cases: own.length,
      turns: turns.length,
      recall: found / Math.max(1, turns.length),
      everFound:
        turns.filter((s) => s.late_s !== null && s.late_s >= 0).length / Math.max(1, turns.length),
      timesCover: turns.filter((s) => s.found && s.coversTime).length / Math.max(1, found),
      precision: 1 - falsely / Math.max(1, called.length),
      falsely,
      coverage:
        sum((s) => s.inside) /
        Math.max(
          1,
          sum((s) => s.points),
        ),
      above: sum((s) => s.aboveWhileBelow),
      ece: calibrationError(own.flatMap((s) => s.below)),
      silent:
        sum((s) => s.silentRight) /
        Math.max(
          1,
          sum((s) => s.silentPoints),
        ),
      falseSilent: sum((s) => s.silentWrong),
      phase:
        sum((s) => s.phases[0]) /
        Math.max(
          1,
          sum((s) => s.phases[1]),
        ),
    }
  })
}
