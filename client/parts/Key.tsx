import { isWall } from '../screen.js'
import type { MarkKind } from '../shown.js'
import { say } from '../words.js'
import { Chip, EvidenceMark } from './Marks.js'

const standings: readonly (readonly [MarkKind, string])[] = [
  ['above', 'standing.Above'],
  ['near', 'standing.Near'],
  ['below', 'standing.Below'],
  ['poised', 'standing.Poised'],
  ['turned', 'standing.Turned'],
  ['silent', 'standing.Silent'],
  ['intendedTurned', 'key.intended'],
]

/** What the marks and tints mean. */
export const Key = () => {
  const size = isWall.value ? 28 : 20
  return (
    <section class="key" aria-label={say('key.title')}>
      {standings.map(([kind, words]) => (
        <Chip key={kind} kind={kind} text={say(words)} size={size} />
      ))}
      <span class="own-line">
        <i />
        {say('waterline.line')}
      </span>
      <span class="tints">
        <i class="d1" />
        <i class="d2" />
        <i class="d3" />
        <i class="d4" />
        {say('key.tints')}
      </span>
      <span class="break" />
      <EvidenceMark evidence="measured in item" words />
      <EvidenceMark evidence="measured on item wall" words />
      <EvidenceMark evidence="measured on witness" words />
      <EvidenceMark evidence="inferred from air" words />
      <EvidenceMark evidence="inferred from neighbour" words />
      <EvidenceMark evidence="not assessable" words />
    </section>
  )
}
