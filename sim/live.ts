import mqtt from 'mqtt'
import { messageOf } from './messages.js'
import { advance, freshState, type SimState } from './model.js'
import type { World } from './world.js'

/** Wall time between two looks at the clock, ms. */
const every_ms = 250
/** After a longer stop than this the simulation starts afresh at the present, data hours. */
const mostBehind_h = 48
/** Simulated time between two pauses in which others may work. */
const slice_s = 600
/** Messages under way; past it the simulator waits for their acknowledgement. */
const mostUnderWay = 500
/** At a stop nothing is waited for once no acknowledgement has come for so long, wall ms. */
const mostIdle_ms = 2000

export type Demo = { stop(): Promise<void> }

/**
 * Plays a world up to a site's own clock and publishes what its probes send, as any MQTT device
 * would: QoS 1, acknowledged, sent again after a break.
 *
 * @param options.saved   state to go on from, null for a fresh one
 * @param options.keep    given the state now and then, to be saved
 * @param options.now_ms  the site's clock; its speed may change at any time
 */
export const playLive = (options: {
  readonly world: World
  readonly seed: number
  readonly url: string
  readonly saved: SimState | null
  readonly now_ms: () => number
  readonly keep: (state: SimState) => void
  readonly onFault: (error: unknown) => void
}): Demo => {
  const { world, seed } = options
  const client = mqtt.connect(options.url, {
    clientId: `sim-${crypto.randomUUID().slice(0, 8)}`,
    reconnectPeriod: 1000,
    queueQoSZero: false,
  })
  client.on('error', options.onFault)
  const behind_h = (state: SimState) =>
    (options.now_ms() - world.start_ms - state.t_s * 1000) / 3_600_000
  let state: SimState =
    options.saved !== null && behind_h(options.saved) < mostBehind_h
      ? options.saved
      : freshState(world, seed)
  // A fresh one at a late start has its whole past still before it: nobody waits for that.
  if (behind_h(state) > mostBehind_h)
    state = freshState(world, seed, Math.floor((options.now_ms() - world.start_ms) / 5000) * 5)
  let stopped = false
  let underWay = 0
  let playing = Promise.resolve()

  const play = async () => {
    const goal_s = (options.now_ms() - world.start_ms) / 1000
    while (!stopped && client.connected && state.t_s + 5 <= goal_s && underWay < mostUnderWay) {
      const { sent } = advance(world, state, Math.min(goal_s, state.t_s + slice_s), seed)
      const messages = sent.map((s) => messageOf(world, s)).filter((m) => m !== null)
      underWay += messages.length
      for (const { topic, payload } of messages)
        client.publish(topic, payload, { qos: 1 }, () => {
          underWay -= 1
        })
      options.keep(state)
      await new Promise((resolve) => setImmediate(resolve))
    }
  }
  const timer = setInterval(() => {
    playing = playing.then(play).catch(options.onFault)
  }, every_ms)

  /** What the state counts as sent is acknowledged, or the broker has gone. */
  const settled = async () => {
    const pause_ms = 20
    let left = underWay
    for (let idle_ms = 0; underWay > 0 && client.connected && idle_ms < mostIdle_ms; ) {
      await new Promise((resolve) => setTimeout(resolve, pause_ms))
      idle_ms = underWay < left ? 0 : idle_ms + pause_ms
      left = underWay
    }
  }

  return {
    async stop() {
      stopped = true
      clearInterval(timer)
      await playing
      await settled()
      await client.endAsync(true)
    },
  }
}
