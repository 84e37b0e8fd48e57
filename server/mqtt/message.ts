/** One MQTT message as it came in, from either way. */
export type Incoming = {
  readonly topic: string
  readonly payload: Uint8Array
  /** The broker kept it and hands out a copy: last known, not fresh. */
  readonly retain: boolean
  /** Name of the outside broker; null for our own. */
  readonly broker: string | null
}

/** Resolves when all that the message said is on disk; rejects with an Outage when it cannot be. */
export type Receive = (message: Incoming) => Promise<void>
