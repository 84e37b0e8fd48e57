import { z } from 'zod'
import { celsius, finite } from './must.js'
import { Container, ContainerPhysics, Product, ProductPhysics } from './product.js'

/** Questions of the headless commands (interfaces.md §4). */

const id = z.union([z.string(), z.number()]).optional()

/** The product of a question; one of a site file may be pasted as it is. */
const AskedProduct = z.strictObject({ ...Product.partial().shape, ...ProductPhysics.shape })

/** The container of a question; one of a site file may be pasted as it is. */
const AskedContainer = z.strictObject({ ...Container.partial().shape, ...ContainerPhysics.shape })

/** "If it froze now." */
export const FreezeQuestion = z.strictObject({
  id,
  product: AskedProduct,
  container: AskedContainer.optional(),
  /** The physics knows its range and refuses what lies outside. */
  from_C: finite,
  air_C: celsius.nullable().optional(),
})
export type FreezeQuestion = z.infer<typeof FreezeQuestion>

/** A picture has a few hundred points; a table a few thousand. */
const mostTemperatures = 100_000

/** The two curves at given temperatures. */
export const CurveQuestion = z.strictObject({
  id,
  product: AskedProduct,
  temperatures_C: z.array(finite).max(mostTemperatures),
})
export type CurveQuestion = z.infer<typeof CurveQuestion>
