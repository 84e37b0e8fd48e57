import type { ErrorRequestHandler, Response } from 'express'
import type { Problem } from '../../config/schema/api.js'
import { Refusal } from '../../config/schema/refusal.js'
import { Outage } from '../seam.js'

/** The HTTP status that fits a refusal's code; 400 where none fits better. */
const statusOf: Readonly<Record<string, number>> = {
  'not-found': 404,
  'not-here': 403,
  'not-practice': 409,
}

export const answerProblem = (res: Response, problem: Problem): void => {
  res.status(problem.status).type('application/problem+json').send(JSON.stringify(problem))
}

/** A refusal as RFC 9457 problem details, with field, value and remedy. */
export const problemOf = (refusal: Refusal): Problem => ({
  type: `urn:hoarline:problem:${refusal.code}`,
  title: refusal.problem,
  status: statusOf[refusal.code] ?? 400,
  detail: refusal.message,
  field: refusal.field,
  value: refusal.value ?? null,
  remedy: refusal.remedy,
})

/**
 * Every error that reaches a person through HTTP. Input is answered with what to change; an outage
 * with what is away; a bug with a plain sentence, its cause in the log.
 */
export const answerErrors =
  (log: { error(context: object, text: string): void }): ErrorRequestHandler =>
  (error, req, res, _next) => {
    if (error instanceof Refusal) return answerProblem(res, problemOf(error))
    if (error instanceof Outage)
      return answerProblem(res, {
        type: `urn:hoarline:problem:outage-${error.part}`,
        title: `the ${error.part} is away`,
        status: 503,
        detail: error.message,
        remedy: 'nothing stored is lost; try again when it is back',
      })
    // body-parser's own refusals carry a status below 500.
    const status = (error as { status?: number }).status
    if (typeof status === 'number' && status < 500)
      return answerProblem(res, {
        type: 'urn:hoarline:problem:unreadable',
        title: 'the request could not be read',
        status,
        detail: (error as Error).message,
        remedy: 'send JSON as the API describes it',
      })
    log.error({ err: error, path: req.path }, 'a request failed by a fault of ours')
    return answerProblem(res, {
      type: 'urn:hoarline:problem:fault',
      title: 'this went wrong on our side',
      status: 500,
      detail: 'nothing stored was changed; the log of the program has the cause',
    })
  }
