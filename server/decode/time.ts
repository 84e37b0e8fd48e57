/** Device clocks and what may be believed of them. */

/**
 * No device of the trade has readings from before this: an earlier time is a clock that was never
 * set (they wake up in 1970 or 1980) [common practice].
 */
export const earliest_ms = Date.UTC(2000, 0, 1)

/**
 * A time this far ahead of receipt is no clock that runs fast but a wrong unit, and says nothing
 * of when it was measured.
 */
export const beyond_ms = 86_400_000

const units = [
  { name: 'seconds', perSecond: 1 },
  { name: 'milliseconds', perSecond: 1000 },
  { name: 'microseconds', perSecond: 1e6 },
  { name: 'nanoseconds', perSecond: 1e9 },
] as const

/** Year, month and day in plain sight, for a message; null past what a date can be. */
const dateOf = (t_ms: number): string | null =>
  Math.abs(t_ms) <= 8.64e15 ? new Date(t_ms).toISOString().slice(0, 19).concat('Z') : null

/**
 * Which unit would make sense of a number that was read as a time and came out impossible.
 *
 * @param written  the number as sent
 * @returns        "in microseconds it is 2026-01-05T03:10:00Z", or null where none would
 */
export const likelierUnit = (
  written: number,
  receivedAt_ms: number,
): { unit: string; text: string } | null => {
  for (const { name, perSecond } of units) {
    const t_ms = (written / perSecond) * 1000
    if (t_ms >= earliest_ms && t_ms <= receivedAt_ms + beyond_ms)
      return { unit: name, text: `as ${name} it is ${dateOf(t_ms)}` }
  }
  return null
}

/** What a time came to, for a message. */
export const inWords = (t_ms: number): string => dateOf(t_ms) ?? 'past all calendars'

// RFC 3339 §5.6, and what ISO 8601 adds that gateways send: no separators, no colon in the offset.
const rfc3339 = /^\d{4}-\d{2}-\d{2}[Tt ]\d{2}:\d{2}:\d{2}(\.\d+)?([Zz]|[+-]\d{2}:\d{2})$/
const iso8601 =
  /^(\d{4})-?(\d{2})-?(\d{2})[Tt ](\d{2}):?(\d{2})(?::?(\d{2})(?:[.,](\d+))?)?([Zz]|[+-]\d{2}(?::?\d{2})?)$/

/**
 * A time written as text, with its offset.
 *
 * @returns UTC ms, or null when the text is no such time. A time without offset is refused:
 *          nobody can say which zone its device is in.
 */
export const timeOfText = (text: string, format: 'rfc3339' | 'iso8601'): number | null => {
  if (format === 'rfc3339' && !rfc3339.test(text)) return null
  const parts = iso8601.exec(text)
  if (parts === null) return null
  const [, y, mo, d, h, mi, s = '00', fraction = '0', zone = 'Z'] = parts
  const offset = /^[Zz]$/.test(zone)
    ? 'Z'
    : `${zone.slice(0, 3)}:${zone.slice(3).replace(':', '') || '00'}`
  // A leap second is the second before it, one long (POSIX time has no name for it).
  const seconds = s === '60' ? '59' : s
  const t_ms = Date.parse(
    `${y}-${mo}-${d}T${h}:${mi}:${seconds}.${fraction.slice(0, 3).padEnd(3, '0')}${offset}`,
  )
  // Date.parse takes 30 February for 2 March.
  const day = new Date(Date.UTC(Number(y), Number(mo) - 1, Number(d))).getUTCDate()
  return Number.isNaN(t_ms) || day !== Number(d) ? null : t_ms
}
