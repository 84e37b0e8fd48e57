import { existsSync } from 'node:fs'
import { delimiter, join } from 'node:path'
import { test } from 'vitest'

/** Longer tests run, and nothing may be missing, under `npm run nightly`. */
export const nightly = process.env.HOARLINE_NIGHTLY === '1'

const places = [...(process.env.PATH ?? '').split(delimiter), '/usr/sbin', '/usr/local/sbin']

/** Full path of a program, or null where this machine has none. */
export const program = (name: string): string | null =>
  places.map((place) => join(place, name)).find((file) => existsSync(file)) ?? null

/**
 * A test that wants more than `npm ci` brings. Where that is missing, `npm test` says so and goes
 * on; nightly fails.
 *
 * @param missing  what is missing, or null when all is there
 */
export const testNeeding = (
  missing: string | null,
  name: string,
  run: () => void | Promise<void>,
  timeout_ms?: number,
): void => {
  if (missing === null) test(name, run, timeout_ms)
  else if (nightly)
    test(name, () => {
      throw new Error(`this machine has no ${missing}, and nightly leaves nothing out`)
    })
  else {
    console.warn(`NOT RUN: ${name}, ${missing} is missing`)
    test.skip(name, run)
  }
}
