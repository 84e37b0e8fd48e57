import type { Evidence } from '../../config/schema/verdict.js'
import { evidenceShapes, type Part, shapes } from '../chart/shapes.js'
import { evidenceOf, type MarkKind } from '../shown.js'
import { say } from '../words.js'

const Stroke = ({ part }: { part: Part }) => (
  <path
    d={part.d}
    fill={part.fill === undefined ? 'none' : `var(--${part.fill})`}
    stroke={part.stroke === undefined ? 'none' : `var(--${part.stroke})`}
    stroke-width={part.width ?? 0}
    stroke-dasharray={part.dash?.join(' ')}
    stroke-linecap="round"
    stroke-linejoin="round"
  />
)

/** A standing's mark. Decoration: its word always stands beside it. */
export const Mark = ({ kind, size = 22 }: { kind: MarkKind; size?: number }) => (
  <svg class="mark" width={size} height={size} viewBox="-13 -13 26 26" aria-hidden="true">
    {shapes[kind].parts.map((part) => (
      <Stroke key={part.d} part={part} />
    ))}
  </svg>
)

/** What a claim rests on: its mark, in words for who cannot see it or wants to know. */
export const EvidenceMark = ({ evidence, words }: { evidence: Evidence; words?: boolean }) => {
  const text = say(`evidence.${evidence}`)
  const parts = evidenceShapes[evidenceOf(evidence)]
  const mark = (
    <svg width="14" height="14" viewBox="-7 -7 14 14" aria-hidden="true">
      {parts.map((part) => (
        <Stroke key={part.d} part={part} />
      ))}
    </svg>
  )
  return words === true ? (
    <span class="ev">
      {mark}
      {text}
    </span>
  ) : (
    <span class="ev" role="img" aria-label={text} title={text}>
      {mark}
    </span>
  )
}

/** A mark and its word. */
export const Chip = ({ kind, text, size }: { kind: MarkKind; text: string; size?: number }) => (
  <span class="chip">
    <Mark kind={kind} size={size ?? 22} />
    <span>{text}</span>
  </span>
)

/** Mandatory action: a blue disc with a tick. */
export const DoSign = () => (
  <svg width="20" height="20" viewBox="0 0 20 20" aria-hidden="true">
    <circle cx="10" cy="10" r="10" fill="var(--blue)" />
    <path
      d="M5.4 10.4L8.8 13.6L14.6 6.8"
      stroke="var(--on-blue)"
      stroke-width="2.4"
      fill="none"
      stroke-linecap="round"
      stroke-linejoin="round"
    />
  </svg>
)

/** Prohibition: a red barred ring. */
export const DoNotSign = () => (
  <svg width="20" height="20" viewBox="0 0 20 20" aria-hidden="true">
    <circle cx="10" cy="10" r="8.6" fill="none" stroke="var(--red)" stroke-width="2.8" />
    <path d="M4.2 4.2L15.8 15.8" stroke="var(--red)" stroke-width="2.8" />
  </svg>
)

export const Logo = () => (
  <svg width="30" height="30" viewBox="0 0 30 30" aria-hidden="true">
    <path d="M7 3V27M23 3V27" stroke="var(--ink)" stroke-width="4.4" />
    <path
      d="M1 15.4Q4.5 12.6 8 15.4T15 15.4T22 15.4T29 15.4"
      stroke="var(--sheet)"
      stroke-width="6.4"
      fill="none"
    />
    <path
      d="M1 15.4Q4.5 12.6 8 15.4T15 15.4T22 15.4T29 15.4"
      stroke="var(--mag)"
      stroke-width="2.4"
      fill="none"
    />
  </svg>
)
