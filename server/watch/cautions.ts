import type { Caution, CautionWhen } from '../../config/schema/caution.js'
import type { Harm, Product } from '../../config/schema/product.js'
import type { StorageUnitKind } from '../../config/schema/site.js'
import type { Phase, Standing } from '../../config/schema/verdict.js'

/** All that a caution may depend on. */
export type Situation = {
  readonly standing: Standing
  readonly phase: Phase
  readonly harm: Harm
  readonly asIntended: boolean
  readonly hasBeenFrozen: boolean
  readonly container: { readonly fill_kg: number; readonly sealed: boolean }
  readonly storageUnitKind: StorageUnitKind
  /** See `tagsOf`. */
  readonly tags: readonly string[]
}

type Class = Product['nucleation']
const tissues: readonly Class[] = ['animal-tissue', 'plant-tissue']
const foods: readonly Class[] = [...tissues, 'food-liquid', 'dairy']

/**
 * The tags of a product: its own `cautions`, "food" where its composition or its nucleation class
 * says so, and "tissue" for a food that is no liquid in a container. A site that describes a food
 * by composition should not have to say twice that it is one.
 *
 * @param product  as in force
 * @returns        each tag once
 */
export function tagsOf(
  product: Pick<Product, 'cautions' | 'freezing' | 'nucleation'>,
): readonly string[] {
  const isFood = product.freezing.kind === 'food' || foods.includes(product.nucleation)
  const derived = [
    ...(isFood ? ['food'] : []),
    ...(tissues.includes(product.nucleation) ? ['tissue'] : []),
  ]
  return [...new Set([...product.cautions, ...derived])]
}

const among = <T>(allowed: readonly T[] | undefined, value: T): boolean =>
  allowed === undefined || allowed.includes(value)

const same = <T>(wanted: T | undefined, value: T): boolean =>
  wanted === undefined || wanted === value

const holds = (when: CautionWhen, s: Situation): boolean =>
  among(when.standing, s.standing) &&
  among(when.phase, s.phase) &&
  among(when.harm, s.harm) &&
  same(when.asIntended, s.asIntended) &&
  same(when.hasBeenFrozen, s.hasBeenFrozen) &&
  among(when.storageUnitKind, s.storageUnitKind) &&
  same(when.sealed, s.container.sealed) &&
  s.container.fill_kg >= (when.fill_kg?.atLeast ?? 0) &&
  s.container.fill_kg < (when.fill_kg?.below ?? Number.POSITIVE_INFINITY) &&
  (when.anyTag === undefined || when.anyTag.some((tag) => s.tags.includes(tag))) &&
  !when.noTag?.some((tag) => s.tags.includes(tag))

/**
 * The cautions that a situation calls for.
 *
 * A row applies when one of its `when` holds entirely. The order is that of `urgency`, not of the
 * table: danger to people first, then what must not be done in the next minute, then the rest.
 *
 * @param situation  of one stored item at one instant
 * @param table      the rows of config/library/cautions.json
 * @returns          keys, most urgent first; at least one for every standing but Above
 * @source           the situations are those of the handling cautions of the trade [common practice]
 */
export function cautionsFor(situation: Situation, table: readonly Caution[]): string[] {
  return table
    .filter((row) => row.when.some((when) => holds(when, situation)))
    .sort((a, b) => a.urgency - b.urgency)
    .map((row) => row.key)
}
