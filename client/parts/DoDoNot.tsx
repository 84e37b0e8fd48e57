import type { ComponentChildren } from 'preact'
import type { CautionRow } from '../../config/schema/api.js'
import { say } from '../words.js'
import { DoNotSign, DoSign } from './Marks.js'

const Blocks = ({ row }: { row: CautionRow }) => (
  <div class="dd">
    <div class="do">
      <h3>
        <DoSign />
        {say('caution.do')}
      </h3>
      <ul>
        {row.do.map((line) => (
          <li key={line}>{line}</li>
        ))}
      </ul>
    </div>
    <div class="dont">
      <h3>
        <DoNotSign />
        {say('caution.doNot')}
      </h3>
      <ul>
        {row.doNot.map((line) => (
          <li key={line}>{line}</li>
        ))}
      </ul>
    </div>
  </div>
)

/**
 * What people do and do not: the most urgent situation in full, the others one press away. Never
 * one block without the other, and never without deferring to whoever decides.
 */
export const DoDoNot = ({
  rows,
  after,
}: {
  rows: readonly CautionRow[]
  /** What stands right under the two blocks. */
  after?: ComponentChildren
}) => {
  const [first, ...others] = rows
  if (first === undefined) return <>{after}</>
  return (
    <div class="cautions">
      <Blocks row={first} />
      {after}
      {others.length > 0 && (
        <details class="more">
          <summary>
            {say('caution.more', { count: others.length, first: others[0]?.title ?? '' })}
          </summary>
          {others.map((row) => (
            <section key={row.key} aria-label={row.title}>
              <h4>{row.title}</h4>
              <Blocks row={row} />
            </section>
          ))}
        </details>
      )}
      <p class="closing">{first.closing}</p>
    </div>
  )
}
