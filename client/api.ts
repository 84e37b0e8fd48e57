import type {
  CautionRow,
  ItemCurves,
  ItemReadings,
  ItemTrail,
  Problem,
  RefusedView,
  Snapshot,
} from '../config/schema/api.js'

/** An answer that was not what was asked for, with what a person can do about it. */
export class ApiError extends Error {
  override readonly name = 'ApiError'
  constructor(
    readonly status: number,
    readonly problem: Problem | null,
    message: string,
  ) {
    super(message)
  }
}

const base = '/api/v1'
/** A server that has not answered by then is away: the screen must say so rather than wait. */
const patience_ms = 15_000

const problemOf = async (answer: Response): Promise<Problem | null> => {
  if (!answer.headers.get('content-type')?.includes('problem+json')) return null
  // The cast: the content type says so, and every field is optional to us.
  return (await answer.json()) as Problem
}

const ask = async <T>(path: string, init: RequestInit = {}): Promise<T> => {
  const answer = await fetch(base + path, { ...init, signal: AbortSignal.timeout(patience_ms) })
  if (!answer.ok) {
    const problem = await problemOf(answer)
    throw new ApiError(answer.status, problem, problem?.detail ?? `HTTP ${answer.status}`)
  }
  return (await answer.json()) as T
}

const query = (values: Readonly<Record<string, string | number | undefined>>): string => {
  const text = new URLSearchParams()
  for (const [key, value] of Object.entries(values))
    if (value !== undefined) text.set(key, String(value))
  const written = text.toString()
  return written === '' ? '' : `?${written}`
}

const instant = (t_ms: number): string => new Date(Math.round(t_ms)).toISOString()
const item = (id: string): string => `/items/${encodeURIComponent(id)}`

/** Everything that this page asks of the server. */
export const api = {
  snapshot: () => ask<Snapshot>('/items'),
  readings: (id: string, span: { from_ms: number; until_ms: number; points: number }) =>
    ask<ItemReadings>(
      `${item(id)}/readings${query({
        from: instant(span.from_ms),
        until: instant(span.until_ms),
        points: span.points,
      })}`,
    ),
  trail: (id: string) => ask<ItemTrail>(`${item(id)}/verdicts`),
  curves: (id: string) => ask<ItemCurves>(`${item(id)}/what-if`),
  cautions: () => ask<readonly CautionRow[]>('/cautions'),
  refused: () => ask<readonly RefusedView[]>('/probes/refused'),
  setSpeed: (speed: number) =>
    ask<{ speed: number }>('/practice/speed', {
      method: 'PUT',
      headers: { 'content-type': 'application/json' },
      body: JSON.stringify({ speed }),
    }),
}

/** What went wrong, in the words of whoever refused, or of the one who could not be reached. */
export const remedyOf = (error: unknown, unreachable: string): string => {
  if (error instanceof ApiError && error.problem !== null) {
    const { detail, remedy } = error.problem
    return remedy === undefined || detail.includes(remedy) ? detail : `${detail}; ${remedy}`
  }
  return unreachable
}
