import { existsSync } from 'node:fs'
import { join } from 'node:path'
import express, { type Express, type Request } from 'express'
import helmet from 'helmet'
import { z } from 'zod'
import type {
  CautionRow,
  ItemCurves,
  ItemReadings,
  ItemTrail,
  RefusedView,
  Snapshot,
} from '../../config/schema/api.js'
import { instant } from '../../config/schema/must.js'
import { parse } from '../../config/schema/parse.js'
import { Refusal } from '../../config/schema/refusal.js'
import { speeds } from '../siteClock.js'
import { answerErrors } from './problem.js'

/** What the routes ask of the rest of the program; main gives it. */
export type Answers = {
  snapshot(): Snapshot
  readings(
    item: string,
    span: { from_ms: number | null; until_ms: number | null; points: number },
  ): Promise<ItemReadings>
  trail(item: string): ItemTrail
  curves(item: string): Promise<ItemCurves>
  cautions(): readonly CautionRow[]
  refused(limit: number): readonly RefusedView[]
  /** Null on a real site: a real site's clock has no speed. */
  setSpeed: ((speed: number) => void) | null
  health(): { live: boolean; ready: boolean; outage: string | null; behind_s: number }
}

const loopbackNames = new Set(['127.0.0.1', 'localhost', '[::1]'])

/**
 * A page of somebody else's must not reach this program through a name that it points at loopback
 * (DNS rebinding): until sign-in exists, only requests addressed to loopback by name are answered.
 */
export const isLoopbackHost = (host: string | undefined): boolean =>
  host !== undefined && loopbackNames.has(host.replace(/:\d+$/, ''))

/** A change is taken only from our own page, or from a program (which sends no Origin). */
const isOwnOrigin = (req: Request): boolean => {
  const origin = req.get('origin')
  return origin === undefined || origin === `${req.protocol}://${req.get('host')}`
}

const Span = z.strictObject({
  from: instant.optional(),
  until: instant.optional(),
  points: z.coerce.number().int().min(10).max(5000).default(1500),
})

const Speed = z.strictObject({ speed: z.number().min(speeds.least).max(speeds.most) })

const ms = (text: string | undefined): number | null =>
  text === undefined ? null : Date.parse(text)

/**
 * The pages and the interface of interfaces.md §5, as far as first light goes. Nothing here
 * decides: each route checks its input, asks, and answers.
 *
 * @param pages  folder of the built client
 */
export const apiApp = (
  answers: Answers,
  pages: string,
  log: { error(context: object, text: string): void },
): Express => {
  const app = express()
  app.disable('x-powered-by')
  app.set('etag', 'strong')
  app.use(
    helmet({
      contentSecurityPolicy: {
        useDefaults: false,
        directives: {
          defaultSrc: ["'none'"],
          scriptSrc: ["'self'"],
          styleSrc: ["'self'"],
          fontSrc: ["'self'"],
          imgSrc: ["'self'", 'data:'],
          connectSrc: ["'self'"],
          manifestSrc: ["'self'"],
          baseUri: ["'none'"],
          formAction: ["'self'"],
          frameAncestors: ["'none'"],
        },
      },
      crossOriginEmbedderPolicy: false,
      // Plain HTTP on loopback: a browser told to insist on TLS would lock its user out.
      strictTransportSecurity: false,
      referrerPolicy: { policy: 'no-referrer' },
    }),
  )
  app.use((req, _res, next) => {
    if (!isLoopbackHost(req.get('host')))
      throw new Refusal(
        'not-here',
        'Host',
        req.get('host') ?? '',
        'this address is not loopback',
        'open the page by the address that the program printed',
      )
    if (req.method !== 'GET' && req.method !== 'HEAD' && !isOwnOrigin(req))
      throw new Refusal(
        'not-here',
        'Origin',
        req.get('origin') ?? '',
        'a change may come from our own page only',
        'use the page itself',
      )
    next()
  })
  app.use(express.json({ limit: '64kb' }))

  const api = express.Router()
  api.use((_req, res, next) => {
    res.set('Cache-Control', 'no-store')
    next()
  })
  api.get('/items', (_req, res) => void res.json(answers.snapshot()))
  api.get('/items/:id', (req, res) => {
    const item = answers.snapshot().items.find((i) => i.id === req.params.id)
    if (item === undefined)
      throw new Refusal(
        'not-found',
        'id',
        req.params.id,
        'there is no such stored item',
        'take an id from /api/v1/items',
      )
    res.json(item)
  })
  api.get('/items/:id/readings', async (req, res) => {
    const span = parse(Span, req.query)
    res.json(
      await answers.readings(req.params.id, {
        from_ms: ms(span.from),
        until_ms: ms(span.until),
        points: span.points,
      }),
    )
  })
  api.get('/items/:id/verdicts', (req, res) => void res.json(answers.trail(req.params.id)))
  api.get(
    '/items/:id/what-if',
    async (req, res) => void res.json(await answers.curves(req.params.id)),
  )
  api.get('/cautions', (_req, res) => void res.json(answers.cautions()))
  api.get('/probes', (_req, res) => void res.json(answers.snapshot().probes))
  api.get('/probes/refused', (_req, res) => void res.json(answers.refused(200)))
  api.get('/storage-units', (_req, res) => void res.json(answers.snapshot().storageUnits))
  api.put('/practice/speed', (req, res) => {
    if (answers.setSpeed === null)
      throw new Refusal(
        'not-practice',
        'speed',
        req.body,
        'a real site runs on the wall clock',
        'leave it',
      )
    const { speed } = parse(Speed, req.body)
    answers.setSpeed(speed)
    res.json({ speed })
  })
  api.get('/health', (_req, res) => {
    const health = answers.health()
    res.status(health.ready ? 200 : 503).json(health)
  })
  api.use((req) => {
    throw new Refusal(
      'not-found',
      'path',
      `${req.baseUrl}${req.path}`,
      'there is nothing here',
      'see DEVELOPERS.md for the routes',
    )
  })
  app.use('/api/v1', api)

  // Built files carry a hash in their name, so they may be kept; the page itself may not.
  app.use(
    '/assets',
    express.static(join(pages, 'assets'), { immutable: true, maxAge: '1y', fallthrough: false }),
  )
  app.use(express.static(pages, { index: false, maxAge: 0 }))
  app.get('/{*path}', (_req, res) => {
    const page = join(pages, 'index.html')
    if (!existsSync(page))
      throw new Refusal('not-found', 'page', '/', 'the pages are not built', 'run npm run build')
    res.set('Cache-Control', 'no-cache').sendFile(page)
  })
  app.use(answerErrors(log))
  return app
}
