import type { Offset, Part } from '../seam.js'
import type { Db } from './database.js'

/** The state of a partition and the offset it stands for. */
export type Snapshot = {
  readonly part: Part
  readonly offset: Offset
  readonly model: string
  readonly configRevision: number
  readonly state: unknown
}

type Row = {
  part: number
  offset: number
  model: string
  config_revision: number
  state: string
}

/** Snapshots of the watch's states, one per partition. The caller owns the transaction. */
export const statesTable = (db: Db) => {
  // A snapshot may not go back: two saves that cross would otherwise step readings twice.
  const save = db.prepare<Row>(`
    INSERT INTO snapshot (part, offset, model, config_revision, state)
    VALUES (@part, @offset, @model, @config_revision, @state)
    ON CONFLICT (part) DO UPDATE SET offset = excluded.offset, model = excluded.model,
      config_revision = excluded.config_revision, state = excluded.state
    WHERE excluded.offset >= snapshot.offset`)
  return {
    save: ({ part, offset, model, configRevision, state }: Snapshot): void =>
      void save.run({
        part,
        offset,
        model,
        config_revision: configRevision,
        state: JSON.stringify(state),
      }),
  }
}

export const statesQueries = (db: Db) => {
  const load = db.prepare<[number], Row>('SELECT * FROM snapshot WHERE part = ?')
  return {
    load(part: Part): Omit<Snapshot, 'part'> | null {
      const row = load.get(part)
      return row === undefined
        ? null
        : {
            offset: row.offset,
            model: row.model,
            configRevision: row.config_revision,
            state: JSON.parse(row.state) as unknown,
          }
    },
  }
}
