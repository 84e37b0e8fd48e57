import { io } from 'socket.io-client'
import type { Changed } from '../config/schema/api.js'
import { api } from './api.js'
import { cautions, fromSnapshot, link, load, merged, wall_ms } from './site.js'

/** Batches that came while the snapshot was under way; more than these and we fetch again. */
const waitingAtMost = 100

/**
 * Keeps site.ts as new as the server is: the snapshot on every connection, then the batches; a gap
 * between them is closed by another snapshot. Nothing is drawn from a guess.
 */
export const follow = (): void => {
  let fetching = false
  let waiting: Changed[] = []

  const take = (batch: Changed): void => {
    if (fetching) {
      waiting.push(batch)
      if (waiting.length > waitingAtMost) waiting.shift()
      return
    }
    const now = load.value
    if (now.kind !== 'ready') return
    const next = merged(now.picture, batch, Date.now())
    if (next === null) void refetch()
    else load.value = { kind: 'ready', picture: next }
  }

  const refetch = async (): Promise<void> => {
    if (fetching) return
    fetching = true
    try {
      const snapshot = await api.snapshot()
      load.value = { kind: 'ready', picture: fromSnapshot(snapshot, Date.now()) }
      if (cautions.value.size === 0)
        cautions.value = new Map((await api.cautions()).map((row) => [row.key, row]))
    } catch (error) {
      if (load.value.kind !== 'ready') load.value = { kind: 'failed', error }
    } finally {
      fetching = false
      const missed = waiting
      waiting = []
      for (const batch of missed) take(batch)
    }
  }

  const socket = io({ path: '/live', transports: ['websocket'] })
  socket.on('connect', () => {
    link.value = { kind: 'live' }
    void refetch()
  })
  socket.on('changed', take)
  const lost = (): void => {
    if (link.value.kind !== 'lost') link.value = { kind: 'lost', since_ms: Date.now() }
  }
  socket.on('disconnect', lost)
  socket.on('connect_error', () => {
    lost()
    // Without a socket the page can still be read as it was: ask once, say that it is not live.
    if (load.value.kind === 'loading') void refetch()
  })
  setInterval(() => {
    wall_ms.value = Date.now()
  }, 1_000)
}
