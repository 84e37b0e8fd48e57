import { expect, test } from 'vitest'
import { temporaryFolder } from '../ingest/intake.js'
import { flawless, killEmbedded, killListener } from './kills.js'

const kills = 250

test.each([
  ['with its embedded broker', killEmbedded],
  ['listening to another', killListener],
])(
  `${kills} kill -9 %s`,
  async (_way, kill) => {
    const found = await kill(temporaryFolder(), kills, 1)
    console.log(JSON.stringify(found))
    expect(found).toMatchObject(flawless)
  },
  1_800_000,
)
