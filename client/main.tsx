import { effect } from '@preact/signals'
import { render } from 'preact'
import '@fontsource-variable/atkinson-hyperlegible-next/wght.css'
import './style/tokens.css'
import './style/base.css'
import './style/frame.css'
import './style/waterline.css'
import './style/hands.css'
import './style/item.css'
import './style/probes.css'
import './style/phone.css'
import './style/wall.css'
import { remedyOf } from './api.js'
import { follow as followFeed } from './feed.js'
import { Frame } from './parts/Frame.js'
import { follow, route } from './route.js'
import { isPhone } from './screen.js'
import { itemById, load } from './site.js'
import { Hands } from './views/Hands.js'
import { ItemSheet } from './views/ItemSheet.js'
import { More } from './views/More.js'
import { Probes } from './views/Probes.js'
import { Waterline } from './views/Waterline.js'
import { say } from './words.js'

/** The line at 0, nothing above or below it, and in words what is being fetched. */
const Loading = () => (
  <div class="loading" role="status">
    <i />
    <p>{say('loading.site')}</p>
  </div>
)

const Failed = ({ error }: { error: unknown }) => (
  <section class="message">
    <div class="note red" role="alert">
      <b>{say('error.title')}</b>
      <p>{remedyOf(error, say('error.unreachable'))}</p>
    </div>
    <button type="button" class="btn" onClick={() => location.reload()}>
      {say('error.again')}
    </button>
  </section>
)

const Unknown = () => (
  <section class="message">
    <h1>{say('unknownView.title')}</h1>
    <a class="btn" href="/" onClick={follow}>
      {say('view.waterline')}
    </a>
  </section>
)

const View = () => {
  const at = route.value
  switch (at.view) {
    case 'hands':
      return isPhone.value ? <Hands /> : <Waterline />
    case 'waterline':
      return <Waterline />
    case 'item':
      return <ItemSheet id={at.id} />
    case 'probes':
      return <Probes />
    case 'more':
      return <More />
    case 'unknown':
      return <Unknown />
  }
}

const Page = () => {
  const state = load.value
  return (
    <Frame>
      {state.kind === 'loading' && <Loading />}
      {state.kind === 'failed' && <Failed error={state.error} />}
      {state.kind === 'ready' && <View />}
    </Frame>
  )
}

/** The tab's name; on a simulated site it begins with the word that says so. */
effect(() => {
  const state = load.value
  const at = route.value
  const item = at.view === 'item' ? itemById.value.get(at.id) : undefined
  const view =
    item !== undefined
      ? `${item.storageUnit} ${item.position}, ${item.productName}`
      : at.view === 'probes'
        ? say('view.probes')
        : say('view.waterline')
  const site = state.kind === 'ready' ? ` – ${state.picture.site.name}` : ''
  const practice = state.kind === 'ready' && state.picture.site.practice
  document.title = `${practice ? `${say('practice.word')} – ` : ''}${view}${site} – Hoarline`
})

const root = document.getElementById('root')
if (root === null) throw new Error('index.html has lost its #root')
render(<Page />, root)
followFeed()
