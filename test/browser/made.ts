import type { ItemView, Snapshot } from '../../config/schema/api.js'
import type { ItemId } from '../../config/schema/site.js'
import type { Interval, Standing, Verdict } from '../../config/schema/verdict.js'

export const policy: Snapshot['site']['policy'] = {
  poisedChance: 0.05,
  poisedHorizon_h: 8,
  chanceQuantile: 'high',
  lead_min: 30,
}

const margins: Readonly<Record<Standing, number | null>> = {
  Above: 4,
  Near: 0.1,
  Below: -2,
  Poised: -5,
  Turned: 0,
  Silent: null,
}

export type Made = {
  readonly standing?: Standing
  readonly unit?: string
  readonly verdict?: Partial<Verdict>
  readonly view?: Partial<ItemView>
  readonly crossing?: Interval | null
  readonly any_1h?: Interval
}

/** An item of which only what a test is about is said. */
export const madeItem = (id: string, made: Made = {}): ItemView => {
  const standing = made.standing ?? 'Above'
  const margin_K = margins[standing]
  const below = standing === 'Below' || standing === 'Poised'
  return {
    id,
    productName: `Product of ${id}`,
    productId: 'p',
    containerName: 'vial',
    fill_kg: 0.01,
    count: 10,
    lot: 'L-1',
    storageUnit: made.unit ?? 'CR-1',
    position: `shelf ${id}`,
    harm: 'freezing',
    label_C: [2, 8],
    verdict: {
      t: '2026-01-05T02:25:00Z',
      item: id as ItemId,
      standing,
      phase: 'liquid',
      hasBeenFrozen: standing === 'Turned',
      evidence: standing === 'Silent' ? 'not assessable' : 'inferred from air',
      evidenceProbes: [],
      temperature_C: margin_K === null ? null : margin_K - 0.5,
      u_K: margin_K === null ? null : 0.3,
      freezingPoint_C: -0.5,
      freezingPoint_u_K: 0.02,
      margin_K,
      belowProbability: margin_K === null ? null : below ? 1 : 0.3,
      turned: {
        probability: 0,
        any: [0, 0, 0],
        count: [0, 0, 0],
        earliest: null,
        latest: null,
        from_C: null,
        reckoned: false,
      },
      chance: below
        ? {
            horizon_h: 8,
            one: [0, 0.1, 0.3],
            any: [0.01, 0.1, 0.6],
            low: 0.01,
            middle: 0.1,
            high: 0.6,
            any_1h: made.any_1h ?? [0.01, 0.1, 0.3],
            basis: 'literature prior, 0 events here',
          }
        : null,
      ifItFreezes: null,
      crossing: { below_h: made.crossing ?? null, above_h: null },
      limits: {
        reading_C: null,
        probe: null,
        label: 'unknown',
        alert: 'unknown',
        action: 'unknown',
      },
      asIntended: false,
      heldBy: null,
      disposition: null,
      harmAssessed: null,
      cautions: [],
      why: [],
      model: '0',
      configRevision: 1,
      ...made.verdict,
    },
    since_ms: 0,
    announcedTurned_ms: null,
    track: [],
    forecast: [],
    tints_K: [-2, -3, -4],
    ...made.view,
  }
}
