import { readSite } from '../../config/schema/readSite.js'
import type { SiteFile } from '../../config/schema/site.js'

/** A site with nothing but probes; each row is a probe as the site file writes it. */
export const siteOf = (probes: readonly object[], rest: object = {}): SiteFile =>
  readSite({
    format: 'hoarline-site/1',
    site: { id: 'test', name: 'Test', zone: 'UTC' },
    probes: probes.map((p) => ({ placement: 'in-air', ...p })),
    ...rest,
  })

export const bytes = (text: string): Uint8Array => new TextEncoder().encode(text)

/** 2026-01-05T03:10:00Z */
export const receipt_ms = Date.UTC(2026, 0, 5, 3, 10)
