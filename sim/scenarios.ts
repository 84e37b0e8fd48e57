import { existsSync, readdirSync, readFileSync } from 'node:fs'
import { join } from 'node:path'
import { projectRoot } from '../config/library/read.js'
import { nearest, parse } from '../config/schema/parse.js'
import { readSite } from '../config/schema/readSite.js'
import { Refusal } from '../config/schema/refusal.js'
import { Scenario } from '../config/schema/scenario.js'
import type { SiteFile } from '../config/schema/site.js'

const folder = (): string => join(projectRoot(), 'config', 'scenarios')
const json = (file: string): unknown => JSON.parse(readFileSync(file, 'utf8'))

/** Every scenario there is, by id. */
export const scenarios = (): Scenario[] =>
  readdirSync(folder())
    .filter((name) => name.endsWith('.json'))
    .sort()
    .map((name) => parse(Scenario, json(join(folder(), name))))

/** @throws Refusal 'unknown-scenario' with the nearest known one */
export const scenarioOf = (id: string): Scenario => {
  const file = join(folder(), `${id}.json`)
  if (/^[a-z0-9-]+$/.test(id) && existsSync(file)) return parse(Scenario, json(file))
  const known = scenarios().map((s) => s.id)
  const near = nearest(id, known)
  throw new Refusal(
    'unknown-scenario',
    '--scenario',
    id,
    'there is no such scenario',
    near === null ? `use one of ${known.join(', ')}` : `did you mean "${near}"?`,
  )
}

/** The site that a scenario plays on; a scenario that names `items` keeps those alone. */
export const siteOf = (scenario: Scenario): SiteFile =>
  readSite(json(join(projectRoot(), 'config', scenario.site)))
