/**
 * Fewer points of a track, without losing an extreme: time is cut into equal buckets, and of each
 * the point with the lowest and the one with the highest value stay, in order of time. The first
 * and the last point always stay. Points without a value (null) go first, as nothing can be drawn
 * of them.
 *
 * @param rows    in order of time: [t_ms, value, …]
 * @param points  about the most that are returned, from 4
 */
export const thin = <T extends readonly [number, number | null, ...unknown[]]>(
  rows: readonly T[],
  points: number,
): readonly T[] => {
  const first = rows[0]
  const last = rows.at(-1)
  if (first === undefined || last === undefined || rows.length <= points) return rows
  const buckets = Math.max(1, Math.floor((points - 2) / 2))
  const width_ms = (last[0] - first[0]) / buckets || 1
  const kept: T[] = [first]
  let at = 0
  let low: T | null = null
  let high: T | null = null
  const close = () => {
    const both = [low, high].filter((p) => p !== null).sort((a, b) => a[0] - b[0])
    for (const p of both) if (kept.at(-1) !== p) kept.push(p)
    low = null
    high = null
  }
  for (const row of rows) {
    const bucket = Math.min(buckets - 1, Math.floor((row[0] - first[0]) / width_ms))
    if (bucket !== at) close()
    at = bucket
    const value = row[1]
    if (value === null) continue
    const lowest: number | null = (low as T | null)?.[1] ?? null
    const highest: number | null = (high as T | null)?.[1] ?? null
    if (lowest === null || value < lowest) low = row
    if (highest === null || value > highest) high = row
  }
  close()
  if (kept.at(-1) !== last) kept.push(last)
  return kept
}
