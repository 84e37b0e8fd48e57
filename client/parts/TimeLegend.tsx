import type { ItemReadings } from '../../config/schema/api.js'
import { say } from '../words.js'

/** What the lines of the time chart are. */
export const TimeLegend = ({ readings }: { readings: ItemReadings | null }) => {
  const placements = new Set(readings?.probes.map((p) => p.placement))
  return (
    <ul class="keys">
      {[...placements].map((placement) => (
        <li key={placement}>
          <svg width="26" height="12" aria-hidden="true">
            {placement === 'in-buffer' ? (
              <rect
                x="9"
                y="2"
                width="8"
                height="8"
                fill="var(--sheet)"
                stroke="var(--ink)"
                stroke-width="1.5"
              />
            ) : (
              <g stroke="var(--ink)" fill="var(--ink)">
                <path d="M0 6H26" stroke-width="1.3" />
                <circle cx="13" cy="6" r={placement === 'in-air' ? 2 : 3} />
              </g>
            )}
          </svg>
          {say(`trace.${placement}`)}
        </li>
      ))}
      <li>
        <svg width="26" height="12" aria-hidden="true">
          <rect y="1" width="26" height="10" fill="var(--mag-2)" opacity=".35" />
          <path d="M0 6H26" stroke="var(--mag)" stroke-width="2.4" />
        </svg>
        {say('trace.estimate')}
      </li>
      <li>
        <svg width="26" height="12" aria-hidden="true">
          <path d="M0 6H26" stroke="var(--mag)" stroke-width="2" stroke-dasharray="6 4" />
        </svg>
        {say('trace.forecast')}
      </li>
      <li>
        <svg width="22" height="12" aria-hidden="true">
          <rect width="22" height="12" fill="none" stroke="var(--rule)" />
          <path d="M2 10L10 2M10 10L18 2" stroke="var(--rule)" />
        </svg>
        {say('trace.gap')}
      </li>
    </ul>
  )
}
