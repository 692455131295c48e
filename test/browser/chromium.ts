import { execFileSync } from 'node:child_process'
import { accessSync, constants, existsSync, readlinkSync } from 'node:fs'
import { createRequire } from 'node:module'
import { delimiter, dirname, join } from 'node:path'
import { chromium } from 'playwright-core'
import type { Browser, BrowserContext, BrowserContextOptions } from 'playwright-core'

/** The environment variable that names the Chromium to test in. */
const variable = 'WINTERCLAY_CHROMIUM'

const systemNames = ['chromium', 'chromium-browser', 'google-chrome', 'google-chrome-stable']
const macPaths = [
  '/Applications/Chromium.app/Contents/MacOS/Chromium',
  '/Applications/Google Chrome.app/Contents/MacOS/Google Chrome',
]

/** Quiet on a closed network, and able to run as root in a container. */
export const chromiumArguments = [
  '--no-sandbox',
  '--disable-background-networking',
  '--disable-component-update',
  '--disable-sync',
  '--no-first-run',
  '--disable-quic',
]

let found: string | null = null

/**
 * Path of a Chromium to test in: the one named by WINTERCLAY_CHROMIUM, else the system's, else playwright's own, which is
 * installed if need be, else (on Debian, as root) the package of the distribution. Throws one clear line where none can be had.
 */
export function findChromium(): string {
  found ??= named() ?? onSystem() ?? fromPlaywright() ?? fromDebian()
  if (found) return found
  throw new Error(
    `Browser tests need a Chromium: none is installed and none could be fetched. Install Chromium or Chrome, or set ${variable} to its path.`,
  )
}

/** Starts a Chromium without a window. The caller closes it. */
export function launchChromium(extraArguments: string[] = []): Promise<Browser> {
  return chromium.launch({
    executablePath: findChromium(),
    headless: true,
    args: [...chromiumArguments, ...extraArguments],
  })
}

/** Starts a Chromium that keeps its storage in `userDataDir`, to be killed and started again on the same data. */
export function launchPersistentChromium(
  userDataDir: string,
  options: BrowserContextOptions & { extraArguments?: string[] } = {},
): Promise<BrowserContext> {
  const { extraArguments = [], ...context } = options
  return chromium.launchPersistentContext(userDataDir, {
    ...context,
    executablePath: findChromium(),
    headless: true,
    args: [...chromiumArguments, ...extraArguments],
  })
}

/** Ends a Chromium started on `userDataDir` as a power cut would: no page gets to say goodbye. */
export function killChromium(userDataDir: string): void {
  // Chromium locks its profile by a link that reads host-pid.
  const pid = Number(readlinkSync(join(userDataDir, 'SingletonLock')).split('-').at(-1))
  if (!Number.isInteger(pid) || pid <= 1) throw new Error(`No Chromium runs on ${userDataDir}.`)
  process.kill(pid, 'SIGKILL')
}

function named(): string | null {
  const path = process.env[variable]
  if (!path) return null
  if (!isProgram(path)) throw new Error(`${variable} names ${path}, which is not a program that can be run.`)
  return path
}

function onSystem(): string | null {
  const folders = (process.env.PATH ?? '').split(delimiter).filter((folder) => folder !== '')
  const candidates = [...systemNames.flatMap((name) => folders.map((folder) => join(folder, name))), ...macPaths]
  return candidates.find(isProgram) ?? null
}

function fromPlaywright(): string | null {
  const path = chromium.executablePath()
  if (existsSync(path) && starts(path)) return path
  const commandLine = join(dirname(createRequire(import.meta.url).resolve('playwright-core/package.json')), 'cli.js')
  runs(process.execPath, [commandLine, 'install', 'chromium'])
  return existsSync(path) && starts(path) ? path : null
}

function fromDebian(): string | null {
  if (!existsSync('/etc/debian_version') || process.getuid?.() !== 0) return null
  // Two test files may come here at the same time: the second waits for the first one's lock.
  const patience = ['-o', 'DPkg::Lock::Timeout=300', '-o', 'Acquire::Retries=2']
  runs('apt-get', [...patience, 'update'])
  runs('apt-get', [...patience, 'install', '-y', '--no-install-recommends', 'chromium'])
  return onSystem()
}

function isProgram(path: string): boolean {
  try {
    accessSync(path, constants.X_OK)
    return true
  } catch {
    return false
  }
}

/** Playwright's download may lack shared libraries of the system; such a Chromium is there but does not start. */
function starts(path: string): boolean {
  return runs(path, ['--version'])
}

function runs(command: string, args: string[]): boolean {
  try {
    execFileSync(command, args, {
      stdio: 'ignore',
      timeout: 240_000,
      env: { ...process.env, DEBIAN_FRONTEND: 'noninteractive' },
    })
    return true
  } catch {
    return false
  }
}
