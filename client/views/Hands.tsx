import { HandsNeeded } from '../parts/HandsNeeded.js'
import { say } from '../words.js'

/** What a phone opens on. */
export const Hands = () => (
  <>
    <h1 class="unseen">{say('hands.title')}</h1>
    <HandsNeeded />
  </>
)
