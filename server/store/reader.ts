import type { Quality } from '../../config/schema/reading.js'
import { countersTable } from './counters.js'
import { openForReading } from './database.js'
import { historyQueries } from './history.js'
import { metaQueries } from './meta.js'
import { quarantineQueries } from './quarantine.js'
import { readingsQueries } from './readings.js'
import { statesQueries } from './states.js'
import { thin } from './thin.js'

/**
 * All questions to the store, over a connection that only reads. Every thread and every command
 * opens its own; none holds a transaction open between questions.
 *
 * @throws Refusal when there is no store in the folder
 */
export const openReader = (data: string) => {
  const db = openForReading(data)
  const readings = readingsQueries(db)
  const history = historyQueries(db)
  return {
    read: readings.read,
    readAll: readings.readAll,
    page: readings.page,
    /**
     * Readings of a probe within [from, until), thinned so that no extreme is lost:
     * [t_ms, celsius as sent, quality].
     */
    points: (
      probe: string,
      from_ms: number | null,
      until_ms: number | null,
      points: number,
    ): readonly (readonly [number, number | null, Quality])[] =>
      thin([...readings.span(probe, from_ms, until_ms)], points),
    estimates: history.estimates,
    trail: history.trail,
    refused: quarantineQueries(db).newest,
    load: statesQueries(db).load,
    counts: countersTable(db).counts,
    meta: metaQueries(db).meta,
    close: (): void => void db.close(),
  }
}
export type Reader = ReturnType<typeof openReader>
