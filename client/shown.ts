import type { ItemView, Snapshot } from '../config/schema/api.js'
import type { Evidence, Standing } from '../config/schema/verdict.js'

/** Which of the drawn shapes an item bears. Hollow grey ones are stock that is meant to be so. */
export type MarkKind =
  | 'above'
  | 'near'
  | 'nearCalm'
  | 'below'
  | 'poised'
  | 'turned'
  | 'silent'
  | 'intendedNear'
  | 'intendedBelow'
  | 'intendedTurned'

type Policy = Snapshot['site']['policy']

/** Turned while either fact holds: the verdict's, or an announcement no person has withdrawn. */
export const shownStanding = (item: ItemView): Standing =>
  item.announcedTurned_ms !== null ? 'Turned' : item.verdict.standing

/** Later readings took a turn back; the record keeps it until a person signs (rulings.md 1). */
export const isWithdrawn = (item: ItemView): boolean =>
  item.announcedTurned_ms !== null && !item.verdict.hasBeenFrozen

/** Stock that is as it should be asks for nobody; going against the intention brings colour back. */
export const isAsIntended = (item: ItemView): boolean => item.verdict.asIntended

/** Near deserves a hand only when it is more likely below than not, or soon will be (rulings.md 14). */
export const isUrgentNear = (item: ItemView, policy: Policy): boolean =>
  (item.verdict.belowProbability ?? 0) >= 0.5 ||
  (item.verdict.crossing.below_h?.[1] ?? Number.POSITIVE_INFINITY) * 60 < policy.lead_min

/** An item above its line that may reach it within the lead time. */
export const isFalling = (item: ItemView, policy: Policy): boolean =>
  (item.verdict.crossing.below_h?.[0] ?? Number.POSITIVE_INFINITY) * 60 < policy.lead_min

export const markOf = (item: ItemView, policy: Policy): MarkKind => {
  const standing = shownStanding(item)
  if (isAsIntended(item)) {
    if (standing === 'Turned') return 'intendedTurned'
    if (standing === 'Below' || standing === 'Poised') return 'intendedBelow'
    if (standing === 'Near') return 'intendedNear'
  }
  if (standing === 'Near') return isUrgentNear(item, policy) ? 'near' : 'nearCalm'
  // The cast: lower-casing the five other standings gives five of the kinds.
  return standing.toLowerCase() as MarkKind
}

/** Its lane opens: room is given where somebody may have to act. */
export const needsRoom = (kind: MarkKind): boolean =>
  kind === 'near' || kind === 'below' || kind === 'poised' || kind === 'turned'

/** The mark of what a claim rests on. */
export type EvidenceKind = 'item' | 'wall' | 'witness' | 'neighbour' | 'air' | 'none'

const evidenceKinds: Readonly<Record<Evidence, EvidenceKind>> = {
  'measured in item': 'item',
  'measured on item wall': 'wall',
  'measured on witness': 'witness',
  'inferred from neighbour': 'neighbour',
  'inferred from air': 'air',
  'inferred from buffer': 'air',
  'not assessable': 'none',
}
export const evidenceOf = (evidence: Evidence): EvidenceKind => evidenceKinds[evidence]

/** Ink is measured, magenta is reckoned. */
export const isInferred = (kind: EvidenceKind): boolean => kind === 'air' || kind === 'neighbour'

/** Standard uncertainty of the margin, K: of the product's temperature and of its freezing point. */
export const marginU_K = (item: ItemView): number | null =>
  item.verdict.u_K === null ? null : Math.hypot(item.verdict.u_K, item.verdict.freezingPoint_u_K)

/** A place without the word every place has, for the narrow foot of a lane. */
export const shortPlace = (position: string): string =>
  position.replace(/^(shelf|place|position|rack|pallet|slot|hook)\s+/i, '') || '·'

/** Depth at which it turned, K below its line (negative); null where that is not known. */
export const turnedDepth_K = (item: ItemView): number | null => {
  const from = item.verdict.turned.from_C
  return from === null ? null : Math.min(0, from - item.verdict.freezingPoint_C)
}

/** When it turned, as best known. */
export const turnedAt_ms = (item: ItemView): number | null => {
  const { earliest, latest } = item.verdict.turned
  if (item.announcedTurned_ms !== null) return item.announcedTurned_ms
  const text = latest ?? earliest
  return text === null ? null : Date.parse(text)
}
