/** On close, so long for what is under way to be committed. */
const goodbye_ms = 5000

/** A PUBACK that says success: the same four bytes in MQTT 3.1.1 and 5 (§3.4). */
const writeAck = (into: Buffer, at: number, messageId: number): void => {
  into[at] = 0x40
  into[at + 1] = 2
  into.writeUInt16BE(messageId, at + 2)
}

export type Acks = {
  /** A publish came; the returned function says that it is on disk. */
  expect(messageId: number): () => void
  /** The connection is over: nothing of it is acknowledged any more. */
  drop(): void
  /** Resolves when all that came is acknowledged, or after a while. */
  quiet(): Promise<void>
}

/**
 * The acknowledgements of one connection, sent in the order in which the publishes came
 * [MQTT-4.6.0-2]. Those of one commit resolve in one turn and leave in one write.
 *
 * @param most  un-acknowledged publishes past which reading pauses, until half are done
 */
export const acksOf = (way: {
  readonly send: (bytes: Buffer) => void
  readonly most: number
  readonly pause: () => void
  readonly resume: () => void
}): Acks => {
  let pending: { messageId: number; done: boolean }[] = []
  let scheduled = false
  let paused = false
  let dropped = false
  let whenQuiet: (() => void) | null = null

  const flush = () => {
    scheduled = false
    if (dropped) return
    const end = pending.findIndex((p) => !p.done)
    const ready = end < 0 ? pending : pending.slice(0, end)
    if (ready.length === 0) return
    pending = end < 0 ? [] : pending.slice(end)
    const bytes = Buffer.allocUnsafe(ready.length * 4)
    ready.forEach(({ messageId }, i) => void writeAck(bytes, i * 4, messageId))
    way.send(bytes)
    if (paused && pending.length <= way.most / 2) {
      paused = false
      way.resume()
    }
    if (pending.length === 0) whenQuiet?.()
  }

  return {
    expect(messageId) {
      const one = { messageId, done: false }
      pending.push(one)
      if (!paused && pending.length >= way.most) {
        paused = true
        way.pause()
      }
      return () => {
        one.done = true
        if (scheduled || dropped) return
        scheduled = true
        setImmediate(flush)
      }
    },
    drop() {
      dropped = true
      pending = []
      whenQuiet?.()
    },
    quiet: () =>
      new Promise((resolve) => {
        if (pending.length === 0) return resolve()
        const late = setTimeout(resolve, goodbye_ms)
        whenQuiet = () => {
          clearTimeout(late)
          resolve()
        }
      }),
  }
}
