/** A value given once (in force always), or as effective-dated values in rising order. */
export type OrHistory<T> =
  | T
  | {
      readonly id?: string | undefined
      readonly history: readonly { readonly from: string; readonly value: T }[]
    }

const rowsOf = <T>(given: OrHistory<T>): readonly { readonly from: string; readonly value: T }[] =>
  typeof given === 'object' && given !== null && 'history' in given
    ? given.history
    : // Given once, it has been in force for ever. The cast: no value of ours has a `history`.
      [{ from: '1970-01-01T00:00:00Z', value: given as T }]

/**
 * The value in force at an instant. Before the first `from`, the first counts (interfaces.md §1).
 *
 * @param t_ms  UTC; a reading is judged by what was in force at its own time
 */
export const inForce = <T>(given: OrHistory<T>, t_ms: number): T => {
  const rows = rowsOf(given)
  const now = rows.findLast((row) => Date.parse(row.from) <= t_ms) ?? rows[0]
  if (now === undefined) throw new Error('a history without a row passed its schema')
  return now.value
}

/** Every value there ever was, oldest first. */
export const everyValue = <T>(given: OrHistory<T>): readonly T[] =>
  rowsOf(given).map((row) => row.value)

/** Instants at which a value changes, rising; empty where it was given once. */
export const changes_ms = <T>(given: OrHistory<T>): readonly number[] =>
  rowsOf(given)
    .slice(1)
    .map((row) => Date.parse(row.from))
