import { execFileSync } from 'node:child_process'
import { existsSync, mkdtempSync, readFileSync, renameSync, rmSync } from 'node:fs'
import { tmpdir, userInfo } from 'node:os'
import { join } from 'node:path'
import { type Browser, chromium } from 'playwright-core'
import { rootFolder } from './root.js'

/** Nothing of this may call out: the tests need no network. */
const flags = [
  '--headless',
  '--no-sandbox',
  '--disable-gpu',
  '--disable-quic',
  '--no-first-run',
  '--disable-background-networking',
  '--disable-component-update',
  '--disable-sync',
]

const installed = ['/usr/bin/chromium', '/usr/bin/chromium-browser', '/usr/bin/google-chrome']

/** `HOARLINE_BROWSER=packed` takes the browser of the development dependencies even so. */
const wantsPacked = (): boolean => process.env.HOARLINE_BROWSER === 'packed'

/** Where the packed browser lies once unpacked; its version is in the name, so a new one is unpacked. */
const unpackedDir = (): string => {
  const manifest = join(rootFolder(), 'node_modules', '@sparticuz', 'chromium', 'package.json')
  const { version } = JSON.parse(readFileSync(manifest, 'utf8')) as { version: string }
  return join(tmpdir(), `hoarline-chromium-${version}-${userInfo().uid}`)
}

/**
 * Unpacks the browser of the development dependencies, once per machine.
 *
 * The package unpacks into the temporary folder and takes any file there for a whole one, so two
 * test processes at once would start half a browser. Hence a process of its own, a folder of its
 * own, and one rename at the end. The Lambda variable makes it unpack its shared libraries too.
 */
const unpack = (): string => {
  const dir = unpackedDir()
  if (existsSync(join(dir, 'chromium'))) return dir
  const staging = mkdtempSync(join(tmpdir(), 'hoarline-unpack-'))
  const program = "(await import('@sparticuz/chromium')).default.executablePath()"
  execFileSync(process.execPath, ['--input-type=module', '-e', `await ${program}`], {
    cwd: rootFolder(),
    env: { ...process.env, TMPDIR: staging, AWS_LAMBDA_JS_RUNTIME: 'nodejs20.x' },
    stdio: ['ignore', 'ignore', 'inherit'],
  })
  try {
    renameSync(staging, dir)
  } catch (error) {
    // Somebody else was quicker: theirs is as good as ours.
    if (!existsSync(join(dir, 'chromium'))) throw error
    rmSync(staging, { recursive: true, force: true })
  }
  return dir
}

/** What the dynamic linker does not find for a program; empty on a machine with all libraries. */
const lacksLibraries = (program: string): boolean => {
  try {
    return execFileSync('ldd', [program], { encoding: 'utf8' }).includes('not found')
  } catch {
    return true // no ldd, or not one that knows the file: bring the libraries
  }
}

/** The Chromium that comes with `npm ci`, with its own libraries and fonts where those lack. */
const launchPacked = async (): Promise<Browser> => {
  const dir = unpack()
  const executablePath = join(dir, 'chromium')
  const env: Record<string, string> = {}
  for (const [name, value] of Object.entries(process.env))
    if (value !== undefined) env[name] = value
  const own = process.env.HOARLINE_BROWSER_LIBRARIES === 'own' || lacksLibraries(executablePath)
  if (own) env.LD_LIBRARY_PATH = join(dir, 'al2023', 'lib')
  if (!existsSync('/etc/fonts')) env.FONTCONFIG_PATH = join(dir, 'fonts')
  return chromium.launch({ executablePath, args: flags, env })
}

/** A browser for the tests: the installed Chromium, else the one from the development dependencies. */
export const launchBrowser = async (): Promise<Browser> => {
  const here = installed.find((path) => existsSync(path))
  if (here === undefined || wantsPacked()) return launchPacked()
  return chromium.launch({ executablePath: here, args: flags })
}
