/** The most of a refused value that a message repeats; the whole value stays where it was kept. */
const shownCharacters = 80

const show = (v: unknown): string =>
  (typeof v === 'object' ? JSON.stringify(v) : String(v)).slice(0, shownCharacters)

/**
 * Input that cannot be used as it stands. Whoever sent it can read what to change.
 *
 * It stands in the schema room, beside the shapes, because every room may refuse and only this
 * room is open to all of them. It imports nothing.
 */
export class Refusal extends Error {
  override readonly name = 'Refusal'
  constructor(
    /** Stable, for programs: 'out-of-range', 'unknown-solute'. */
    readonly code: string,
    /** The sender's own path: 'products[2].freezing.u_K'. */
    readonly field: string,
    readonly value: unknown,
    /** What is wrong with it, in words. */
    readonly problem: string,
    /** What to do instead, in words. */
    readonly remedy: string,
    options?: ErrorOptions,
  ) {
    super(`${field} is ${show(value)}: ${problem}; ${remedy}`, options)
  }
}
