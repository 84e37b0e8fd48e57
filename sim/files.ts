import { closeSync, openSync, writeFileSync, writeSync } from 'node:fs'
import { rfc3339 } from '../config/schema/reading.js'
import { Refusal } from '../config/schema/refusal.js'
import { lineOf } from './messages.js'
import { advance, freshState, meanIce_kg_kg, meanTemperature_C } from './model.js'
import type { World } from './world.js'

/** Truth is written so often, s of simulated time. */
const truthEvery_s = 60

export type Files = {
  readonly truth: string | null
  readonly site: string | null
  readonly readings: string | null
}

const opened = (field: string, file: string): number => {
  try {
    return openSync(file, 'w')
  } catch (error) {
    throw new Refusal(
      'cannot-write',
      field,
      file,
      error instanceof Error ? error.message : 'it cannot be written',
      'name a file in a folder that exists and may be written to',
      { cause: error },
    )
  }
}

const lines = (field: string, file: string | null) => {
  if (file === null) return { write: (_: unknown) => {}, close: () => {} }
  const fd = opened(field, file)
  let waiting: string[] = []
  const flush = () => {
    if (waiting.length > 0) writeSync(fd, `${waiting.join('\n')}\n`)
    waiting = []
  }
  return {
    write: (line: unknown) => {
      waiting.push(JSON.stringify(line))
      if (waiting.length >= 1000) flush()
    },
    close: () => {
      flush()
      closeSync(fd)
    },
  }
}

/**
 * A scenario as files: the site, what its probes read in order of receipt, and what truly was.
 *
 * @returns how many readings and turns there were
 * @throws  Refusal 'cannot-write' naming the file
 */
export const writeFiles = (
  world: World,
  seed: number,
  files: Files,
): { readings: number; turns: number } => {
  if (files.site !== null) {
    const fd = opened('--site', files.site)
    writeFileSync(fd, `${JSON.stringify(world.site, null, 1)}\n`)
    closeSync(fd)
  }
  const truth = lines('--truth', files.truth)
  const readings = lines('--readings', files.readings)
  const state = freshState(world, seed)
  const end_s = world.scenario.hours * 3600
  const count = { readings: 0, turns: 0 }
  for (let t_s = truthEvery_s; t_s <= end_s; t_s += truthEvery_s) {
    const { sent, turns } = advance(world, state, t_s, seed)
    // Every reading is as long on its way, so the order of sending is the order of receipt.
    for (const s of [...sent].sort((a, b) => a.t_s - b.t_s || a.probe - b.probe))
      readings.write(lineOf(world, s))
    for (const turn of turns)
      truth.write({
        t: rfc3339(world.start_ms + turn.t_s * 1000),
        item: world.items[turn.item]?.id,
        event: 'turned',
        from_C: Number(turn.from_C.toFixed(3)),
      })
    world.items.forEach((item, i) => {
      const now = state.items[i]
      if (now === undefined) return
      truth.write({
        t: rfc3339(world.start_ms + t_s * 1000),
        item: item.id,
        T_C: Number(meanTemperature_C(item, now).toFixed(3)),
        ice_kg_kg: Number(meanIce_kg_kg(item, now).toFixed(4)),
        turned: now.turned_s >= 0,
        othersTurned: now.othersTurned,
        air_C: Number((state.units[item.unit]?.air_C ?? Number.NaN).toFixed(2)),
      })
    })
    count.readings += sent.length
    count.turns += turns.length
  }
  truth.close()
  readings.close()
  return count
}
