import { z } from 'zod'
import { must } from './must.js'
import { Harm } from './product.js'
import { StorageUnitKind } from './site.js'
import { Phase, Standing } from './verdict.js'

/**
 * What people do and do not, by situation: config/library/cautions.json holds one row each. Which
 * row applies is data, so that a site's own procedure can later take the place of a row.
 */

/** Conditions that must all hold. One that is left out does not matter. */
export const CautionWhen = z.strictObject({
  standing: z.array(Standing).min(1).optional(),
  phase: z.array(Phase).min(1).optional(),
  harm: z.array(Harm).min(1).optional(),
  asIntended: z.boolean().optional(),
  hasBeenFrozen: z.boolean().optional(),
  storageUnitKind: z.array(StorageUnitKind).min(1).optional(),
  sealed: z.boolean().optional(),
  /** Product in one container, kg: from `atLeast` up to but not including `below`. */
  fill_kg: z
    .strictObject({ atLeast: z.number().optional(), below: z.number().optional() })
    .optional(),
  /** At least one of these tags, or none of those. */
  anyTag: z.array(z.string()).min(1).optional(),
  noTag: z.array(z.string()).min(1).optional(),
})
export type CautionWhen = z.infer<typeof CautionWhen>

/** The words both hands of a person in gloves can take in at a glance. */
export const wordsInALine = 9

const line = z
  .string()
  .min(1)
  .check(
    must(
      (text) => text.trim().split(/\s+/).length <= wordsInALine,
      `a line has at most ${wordsInALine} words`,
      'say it shorter, or make two lines of it',
    ),
  )

export const Caution = z
  .strictObject({
    key: z.string().regex(/^[a-z0-9]+(-[a-z0-9]+)*$/),
    title: z.string().min(1),
    /** Rising: 1 is read first. Danger to people comes before danger to the product. */
    urgency: z.int().min(1),
    /** Any one of these. */
    when: z.array(CautionWhen).min(1),
    /** Each an imperative. */
    do: z.array(line).min(2).max(5),
    /** Each stands under "Do not", so it starts with the bare verb. */
    doNot: z.array(line).min(2).max(5),
    closing: z.string().min(1),
    source: z.string().min(1),
  })
  .meta({ title: 'Caution', description: 'What to do and not to do in one situation.' })
export type Caution = z.infer<typeof Caution>

const allDiffer = (values: readonly unknown[]) => new Set(values).size === values.length

export const CautionTable = z
  .array(Caution)
  .min(1)
  .check(
    must(
      (rows) => allDiffer(rows.map((row) => row.key)),
      'two cautions bear the same key',
      'rename one',
    ),
    must(
      (rows) => allDiffer(rows.map((row) => row.urgency)),
      'two cautions are equally urgent, so their order is left to chance',
      'give each an urgency of its own',
    ),
  )
