import { ThemeSwitch } from '../parts/Frame.js'
import { Key } from '../parts/Key.js'
import { TryProbe } from '../parts/Practice.js'
import { picture } from '../site.js'
import { say } from '../words.js'

/** On a phone: what stands at the edges of a larger screen. */
export const More = () => (
  <div class="more-view">
    <h1>{say('view.more')}</h1>
    <section class="panel" aria-label={say('theme.title')}>
      <header>
        <h2>{say('theme.title')}</h2>
      </header>
      <div class="pad">
        <ThemeSwitch />
      </div>
    </section>
    <TryProbe />
    <section class="panel" aria-label={say('key.title')}>
      <header>
        <h2>{say('key.title')}</h2>
      </header>
      <div class="pad">
        <Key />
      </div>
    </section>
    <p class="statement">{say('frame.statement')}</p>
    <p class="statement">{say('more.model', { model: picture.value?.site.model ?? '' })}</p>
  </div>
)
