import { useSignal } from '@preact/signals'
import type { ComponentChildren } from 'preact'
import { useEffect, useRef } from 'preact/hooks'
import { clock, clockMinute, offset } from '../format.js'
import { follow, path, route } from '../route.js'
import { isPhone, isWall } from '../screen.js'
import { headline } from '../sentences.js'
import { hands, now_ms, type Picture, picture, probesHeard, stale } from '../site.js'
import { chooseTheme, type ThemeChoice, themeChoice } from '../theme.js'
import { say } from '../words.js'
import { Logo } from './Marks.js'
import { PracticeBar, PracticeFrame } from './Practice.js'
import { Notices, StateStrip } from './StateStrip.js'

const ViewLink = ({ to, here, words }: { to: string; here: boolean; words: string }) => (
  <a href={to} aria-current={here ? 'page' : undefined} onClick={follow}>
    {words}
  </a>
)

export const ThemeSwitch = () => (
  <label class="theme">
    <span class="unseen">{say('theme.title')}</span>
    <select
      value={themeChoice.value}
      onChange={(event) => chooseTheme(event.currentTarget.value as ThemeChoice)}
    >
      <option value="system">{say('theme.system')}</option>
      <option value="light">{say('theme.light')}</option>
      <option value="dark">{say('theme.dark')}</option>
    </select>
  </label>
)

const Head = ({ known }: { known: Picture | null }) => {
  const { view } = route.value
  const zone = known?.site.zone ?? 'UTC'
  return (
    <header class="top">
      <a class="brand" href="/" onClick={follow}>
        <Logo />
        <b>Hoarline</b>
      </a>
      <nav class="tabs" aria-label={say('frame.views')}>
        <ViewLink
          to="/"
          here={view === 'hands' || view === 'waterline' || view === 'item'}
          words={say('view.waterline')}
        />
        <ViewLink to="/probes" here={view === 'probes'} words={say('view.probes')} />
      </nav>
      <div class="who">
        {!isWall.value && <ThemeSwitch />}
        {known !== null && (
          <span class="clock">
            {clock(now_ms.value, zone)} <small>{offset(now_ms.value, zone)}</small>
          </span>
        )}
      </div>
    </header>
  )
}

const PhoneHead = ({ known }: { known: Picture | null }) => {
  if (known === null) return null
  const { site, asOf_ms } = known
  const { heard, all } = probesHeard.value
  return (
    <header class="phone-head">
      <p class="a">
        <Logo />
        <b>{site.name}</b>
        <span class="clock">{clockMinute(now_ms.value, site.zone)}</span>
      </p>
      <p class="b">
        <span>
          {say('phone.asOf')}{' '}
          <b>
            {asOf_ms === 0
              ? say('state.never')
              : `${clock(asOf_ms, site.zone)} ${offset(asOf_ms, site.zone)}`}
          </b>
        </span>
        <span>
          {say('phone.heard')} <b>{say('state.ofAll', { heard, all })}</b>
        </span>
      </p>
    </header>
  )
}

const PhoneNav = () => {
  const { view } = route.value
  const count = hands.value.length
  return (
    <nav class="phone-nav" aria-label={say('frame.views')}>
      <a href="/" aria-current={view === 'hands' ? 'page' : undefined} onClick={follow}>
        {say('view.hands')}
        {count > 0 && <b class="tally">{count}</b>}
      </a>
      <ViewLink to="/waterline" here={view === 'waterline'} words={say('view.waterline')} />
      <ViewLink to="/probes" here={view === 'probes'} words={say('view.probes')} />
      <ViewLink to="/more" here={view === 'more'} words={say('view.more')} />
    </nav>
  )
}

/** Says aloud what newly needs a hand; it never takes the focus. */
const Announcer = () => {
  const text = useSignal('')
  const known = useRef<ReadonlySet<string> | null>(null)
  const entries = hands.value
  useEffect(() => {
    const pressing = entries.filter((e) => e.need === 'turned' || e.need === 'poised')
    const fresh = pressing.filter(
      (e) => known.current !== null && !known.current.has(e.key + e.need),
    )
    if (picture.value !== null) known.current = new Set(pressing.map((e) => e.key + e.need))
    const [first] = fresh
    const site = picture.value?.site
    if (first !== undefined && site !== undefined)
      text.value = `${first.storageUnit}: ${headline(first, { now_ms: now_ms.peek(), zone: site.zone })}`
  }, [entries, text])
  return (
    <p class="unseen" aria-live="assertive">
      {text.value}
    </p>
  )
}

/** What stands around every view. Only views that exist are named. */
export const Frame = ({ children }: { children: ComponentChildren }) => {
  const known = picture.value
  const practice = known?.site.practice === true
  const phone = isPhone.value
  const main = useRef<HTMLElement>(null)
  const classes = [
    'frame',
    `view-${route.value.view}`,
    phone ? 'phone' : '',
    isWall.value ? 'wall' : '',
    practice ? 'practice' : '',
    stale.value === null ? '' : 'old-figures',
  ]
  // A new view starts at its beginning, for the keyboard and for the ear.
  const first = useRef(true)
  const at = path.value
  useEffect(() => {
    if (!first.current && at !== '') main.current?.focus({ preventScroll: true })
    first.current = false
  }, [at])
  return (
    <div class={classes.filter((c) => c !== '').join(' ')}>
      <a class="skip" href="#main">
        {say('frame.skip')}
      </a>
      <PracticeBar />
      {phone ? <PhoneHead known={known} /> : <Head known={known} />}
      {known !== null && !phone && <StateStrip known={known} />}
      {known !== null && <Notices known={known} />}
      <main id="main" ref={main} tabIndex={-1}>
        {children}
      </main>
      {phone && <PhoneNav />}
      <Announcer />
      {practice && <PracticeFrame />}
    </div>
  )
}
