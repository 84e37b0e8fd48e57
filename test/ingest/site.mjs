import { readSite } from '../../dist/config/schema/readSite.js'

/** A site of probes alone, for the program of the kill tests. */
export const siteOf = (probes) =>
  readSite({
    format: 'hoarline-site/1',
    site: { id: 'test', name: 'Test', zone: 'UTC' },
    probes: probes.map((p) => ({ placement: 'in-air', ...p })),
  })
