import { type ChildProcess, spawn } from 'node:child_process'
import { existsSync } from 'node:fs'
import { mkdtemp, rm } from 'node:fs/promises'
import { tmpdir } from 'node:os'
import path from 'node:path'
import { freePort } from './cluster'

const root = process.cwd()

/** The folder of the production build that integration and browser tests serve; tests/run.mjs makes it once a run. */
export const TEST_WEB_DIST = process.env.TEST_WEB_DIST ?? '.next-test'

/** Secret of every test web server, so that a test can also make (and forge) tokens. */
export const TEST_AUTH_SECRET = 'a secret of the tests only, long enough to pass'

export type TestWeb = {
  url: string
  process: ChildProcess
  /** everything it wrote so far */
  output: () => string
  /** SIGTERM; resolves with the exit code and the time it took */
  stop: () => Promise<{ code: number | null; signal: NodeJS.Signals | null }>
}

/**
 * Serves the built web application on a free loopback port against one database, and waits until it answers. `env` adds to or
 * overrides what it sees (EBBMARK_DEMO, EBBMARK_DATA_DIR, SMTP_PORT …).
 */
export async function startWeb(options: {
  databaseUrl: string
  env?: Record<string, string>
}): Promise<TestWeb> {
  if (!existsSync(path.join(root, TEST_WEB_DIST, 'BUILD_ID'))) {
    throw new Error(
      `There is no build in ${TEST_WEB_DIST}. npm test makes it; for one file: NEXT_DIST_DIR=${TEST_WEB_DIST} npx next build`,
    )
  }
  const port = await freePort()
  const url = `http://127.0.0.1:${port}`
  const dataDir = options.env?.EBBMARK_DATA_DIR ?? (await mkdtemp(path.join(tmpdir(), 'ebbmark-web-')))
  const next = path.join(root, 'node_modules/next/dist/bin/next')
  const child = spawn(process.execPath, [next, 'start', '-p', String(port), '-H', '127.0.0.1'], {
    cwd: root,
    env: {
      PATH: process.env.PATH,
      HOME: process.env.HOME,
      NODE_ENV: 'production',
      NEXT_TELEMETRY_DISABLED: '1',
      NEXT_DIST_DIR: TEST_WEB_DIST,
      DATABASE_URL: options.databaseUrl,
      EBBMARK_DATA_DIR: dataDir,
      HOST: '127.0.0.1',
      PORT: String(port),
      PUBLIC_URL: url,
      NEXTAUTH_SECRET: TEST_AUTH_SECRET,
      LOG_LEVEL: 'warn',
      ...options.env,
    },
    stdio: ['ignore', 'pipe', 'pipe'],
  })
  let output = ''
  for (const stream of [child.stdout, child.stderr]) stream.on('data', (chunk) => (output += chunk))
  const ended = new Promise<{ code: number | null; signal: NodeJS.Signals | null }>((resolve) =>
    child.once('exit', (code, signal) => resolve({ code, signal })),
  )
  await answers(`${url}/sign-in`, child, () => output)
  return {
    url,
    process: child,
    output: () => output,
    stop: async () => {
      child.kill('SIGTERM')
      const how = await ended
      if (!options.env?.EBBMARK_DATA_DIR) await rm(dataDir, { recursive: true, force: true })
      return how
    },
  }
}

async function answers(url: string, child: ChildProcess, output: () => string): Promise<void> {
  const until = Date.now() + 60_000
  while (Date.now() < until) {
    if (child.exitCode !== null) throw new Error(`The web server ended before it answered:\n${output()}`)
    const response = await fetch(url, { redirect: 'manual' }).catch(() => null)
    if (response) return
    await new Promise((resolve) => setTimeout(resolve, 100))
  }
  child.kill('SIGKILL')
  throw new Error(`The web server did not answer at ${url} within 60 s:\n${output()}`)
}

/** Keeps cookies like a browser would, as far as a test needs. */
export class CookieJar {
  private readonly cookies = new Map<string, string>()

  take(response: Response): void {
    for (const line of response.headers.getSetCookie()) {
      const [pair = '', ...attributes] = line.split(';')
      const at = pair.indexOf('=')
      const name = pair.slice(0, at)
      const gone = attributes.some((each) => /^\s*max-age=0\s*$/i.test(each)) || pair.length === at + 1
      if (gone) this.cookies.delete(name)
      else this.cookies.set(name, pair.slice(at + 1))
    }
  }

  get header(): string {
    return [...this.cookies].map(([name, value]) => `${name}=${value}`).join('; ')
  }

  get(name: string): string | undefined {
    return this.cookies.get(name)
  }
}

/**
 * Signs in over HTTP as next-auth asks (csrf, then callback/credentials) and gives the cookies; with a refused try, `error` is the
 * code in the address it was sent to.
 */
export async function signInOverHttp(
  web: { url: string },
  who: { email: string; password: string },
  headers: Record<string, string> = {},
): Promise<{ jar: CookieJar; error: string | null; location: string }> {
  const jar = new CookieJar()
  const csrf = await fetch(`${web.url}/api/auth/csrf`)
  jar.take(csrf)
  const { csrfToken } = (await csrf.json()) as { csrfToken: string }
  const response = await fetch(`${web.url}/api/auth/callback/credentials`, {
    method: 'POST',
    redirect: 'manual',
    headers: { ...headers, Cookie: jar.header, 'Content-Type': 'application/x-www-form-urlencoded' },
    body: new URLSearchParams({ csrfToken, ...who }).toString(),
  })
  jar.take(response)
  const location = response.headers.get('location') ?? ''
  const error = location ? new URL(location, web.url).searchParams.get('error') : null
  return { jar, error, location }
}
