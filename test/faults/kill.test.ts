import { expect, test } from 'vitest'
import { temporaryFolder } from '../ingest/intake.js'
import { flawless, killEmbedded, killListener } from './kills.js'

const kills = 12

test(`${kills} kill -9 of the program while devices publish: nothing acknowledged is lost, nothing is twice`, async () => {
  const found = await killEmbedded(temporaryFolder(), kills, 20260105)
  console.log(JSON.stringify(found))
  expect(found).toMatchObject(flawless)
  expect(found.acked).toBeGreaterThan(1000)
}, 120_000)

test(`${kills} kill -9 of the program while it hears another broker: all that the broker took arrives once`, async () => {
  const found = await killListener(temporaryFolder(), kills, 20260105)
  console.log(JSON.stringify(found))
  expect(found).toMatchObject(flawless)
  expect(found.acked).toBeGreaterThan(1000)
}, 120_000)

test('a program that acknowledges before it commits is found out by the same kills', async () => {
  const found = await killEmbedded(temporaryFolder(), 4, 20260105, true)
  expect(found.lost).toBeGreaterThan(0)
}, 120_000)
