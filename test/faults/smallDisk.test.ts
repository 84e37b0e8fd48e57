import { spawnSync } from 'node:child_process'
import { mkdtempSync, rmSync, writeFileSync } from 'node:fs'
import { tmpdir } from 'node:os'
import { join } from 'node:path'
import { expect, onTestFinished } from 'vitest'
import { keepAll, reading, testLog } from '../ingest/intake.js'
import { testNeeding } from '../needs.js'

const size_MiB = 4

/** A disk of a few megabytes that is gone after the test; null where this user may mount none. */
const mountSmallDisk = (): string | null => {
  const folder = mkdtempSync(join(tmpdir(), 'hoarline-disk-'))
  const done = spawnSync('mount', ['-t', 'tmpfs', '-o', `size=${size_MiB}m`, 'tmpfs', folder])
  if (done.status === 0) return folder
  rmSync(folder, { recursive: true })
  return null
}

const unmount = (folder: string): void => {
  spawnSync('umount', [folder])
  rmSync(folder, { recursive: true, force: true })
}

const canMount = (() => {
  const folder = mountSmallDisk()
  if (folder !== null) unmount(folder)
  return folder !== null
})()

testNeeding(
  canMount ? null : 'right to mount a small disk (root, tmpfs)',
  'a disk that is truly full: nothing acknowledged is lost, and with room again it goes on by itself',
  async () => {
    const disk = mountSmallDisk() ?? ''
    onTestFinished(() => unmount(disk))
    const ballast = join(disk, 'ballast')
    writeFileSync(ballast, Buffer.alloc(1024 * 1024, 1))
    const { log, nextOutage } = await testLog({ data: join(disk, 'data') })

    let away = false
    const gone = nextOutage().then((outage) => {
      away = true
      return outage
    })
    const acked: number[] = []
    const waiting: Promise<void>[] = []
    for (let n = 0; !away; n += 100) {
      const some = Array.from({ length: 100 }, (_, i) =>
        reading('P', 1e12 + n + i, i, { seq: n + i }),
      )
      waiting.push(keepAll(log, some).then((kept) => void acked.push(...kept.map((r) => r.seq))))
      await Promise.race([waiting.at(-1), gone])
    }
    expect((await gone)?.message).toContain('full')
    expect(acked.length).toBeGreaterThan(1000)
    // Readable while it is full, and all of it there.
    expect(log.reader.readAll(0, 1_000_000).map((r) => r.seq)).toEqual(acked)

    const back = nextOutage()
    rmSync(ballast)
    expect(await back).toBeNull()
    await Promise.all(waiting)
    expect(log.reader.readAll(0, 1_000_000).map((r) => r.seq)).toEqual(acked)
    expect(log.counts()).toMatchObject({ readings: acked.length, duplicates: 0 })
  },
)
