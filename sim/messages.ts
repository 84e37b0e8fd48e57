import { type ReadingLine, rfc3339 } from '../config/schema/reading.js'
import type { Sent } from './model.js'
import type { World } from './world.js'

const probeOf = (world: World, sent: Sent) => {
  const probe = world.probes[sent.probe]
  if (probe === undefined) throw new Error('a reading of no probe')
  return probe
}

/** Seconds a gateway holds a reading before it passes it on [common practice: 1–3 s]. */
const onTheWay_s = 2

/** A reading as one line of a file, as if received shortly after. */
export const lineOf = (world: World, sent: Sent): ReadingLine => ({
  probe: probeOf(world, sent).probe.id,
  t: rfc3339(world.start_ms + sent.t_s * 1000),
  receivedAt: rfc3339(world.start_ms + (sent.t_s + onTheWay_s) * 1000),
  celsius: sent.celsius,
  seq: sent.seq,
})

/**
 * A reading as its probe publishes it: SenML JSON (RFC 8428) with an absolute time.
 *
 * @returns null for a probe whose source is no SenML topic
 */
export const messageOf = (
  world: World,
  sent: Sent,
): { readonly topic: string; readonly payload: string } | null => {
  const { source } = probeOf(world, sent).probe
  if (source?.payload !== 'senml') return null
  const t = (world.start_ms + sent.t_s * 1000) / 1000
  const n = source.name ?? `urn:dev:ow:${probeOf(world, sent).id}`
  return { topic: source.topic, payload: JSON.stringify([{ n, u: 'Cel', t, v: sent.celsius }]) }
}
