import type { SiteFile } from '../config/schema/site.js'

/**
 * The same site at another time: every instant of it moved alike. A scenario is written for its own
 * start; the demo plays it from now on.
 */
export const shifted = (site: SiteFile, by_ms: number): SiteFile => {
  const later = (t: string): string => new Date(Date.parse(t) + by_ms).toISOString()
  const orNull = (t: string | null): string | null => (t === null ? null : later(t))
  return {
    ...site,
    items: site.items.map((i) => ({
      ...i,
      placedAt: later(i.placedAt),
      removedAt: orNull(i.removedAt),
      moves: i.moves.map((m) => ({ ...m, at: later(m.at) })),
      ...(i.splitFrom === undefined
        ? {}
        : { splitFrom: { ...i.splitFrom, at: later(i.splitFrom.at) } }),
    })),
    probes: site.probes.map((p) =>
      p.calibration === undefined || 'history' in p.calibration
        ? p
        : {
            ...p,
            calibration: {
              ...p.calibration,
              ...(p.calibration.at === undefined ? {} : { at: later(p.calibration.at) }),
              ...(p.calibration.due === undefined ? {} : { due: later(p.calibration.due) }),
            },
          },
    ),
    assignments: site.assignments.map((a) => ({
      ...a,
      from: later(a.from),
      until: orNull(a.until),
    })),
    windows: site.windows.map((w) => ({ ...w, from: later(w.from), until: later(w.until) })),
    learned: site.learned.map((l) => ({ ...l, from: later(l.from) })),
  }
}
