// The processes of the stack: started, watched, restarted with growing delay, ended in order.
import { spawn } from 'node:child_process'
import path from 'node:path'

const leash = new URL('./leash.mjs', import.meta.url).href

/**
 * @typedef {object} Spec
 * @property {string} name
 * @property {string[]} args what node runs
 * @property {Record<string, string>} [env] beside what all see
 * @property {boolean} [typescript] load tsx first
 * @property {boolean} [reportsReady] sends { ready: true } over its channel
 * @property {number} [stopWithinMs]
 */

/** Keeps one process running until it is stopped. */
export class Child {
  /** @type {import('node:child_process').ChildProcess | null} */
  process = null
  stopping = false
  restarts = 0
  startedAt = 0

  /**
   * @param {Spec} spec
   * @param {{ root: string, env: NodeJS.ProcessEnv, say: (line: string) => void, output: (name: string, chunk: Buffer) => void }} context
   */
  constructor(spec, context) {
    this.spec = spec
    this.context = context
  }

  /** Starts it; resolves when it says it is ready (or at once where it says nothing). */
  start() {
    const { spec, context } = this
    const before = ['--import', leash, ...(spec.typescript ? ['--import', 'tsx'] : [])]
    const child = spawn(process.execPath, [...before, ...spec.args], {
      cwd: context.root,
      env: { ...context.env, ...spec.env, EBBMARK_LEASH: String(process.pid) },
      stdio: ['ignore', 'pipe', 'pipe', 'ipc'],
      detached: true, // its own group: Ctrl-C reaches it only through the order of stop()
    })
    this.process = child
    this.startedAt = Date.now()
    child.stdout?.on('data', (chunk) => context.output(spec.name, chunk))
    child.stderr?.on('data', (chunk) => context.output(spec.name, chunk))
    return new Promise((resolve) => {
      if (!spec.reportsReady) resolve(undefined)
      child.on(
        'message',
        (/** @type {{ ready?: boolean }} */ message) => message?.ready && resolve(undefined),
      )
      child.on('error', (error) => context.say(`${spec.name} could not be started: ${error.message}`))
      child.on('exit', (code, signal) => {
        this.process = null
        if (!this.stopping) this.restart(code, signal).then(() => resolve(undefined))
      })
    })
  }

  /** @param {number | null} code @param {NodeJS.Signals | null} signal */
  async restart(code, signal) {
    if (Date.now() - this.startedAt > 60_000) this.restarts = 0
    const delayMs = Math.min(30_000, 500 * 2 ** this.restarts++)
    this.context.say(
      `${this.spec.name} ended (${signal ?? `code ${code}`}); starting it again in ${delayMs / 1000} s (${path.join('.data', 'log', `${this.spec.name}.log`)})`,
    )
    await new Promise((resolve) => setTimeout(resolve, delayMs))
    if (this.stopping) return
    await this.start()
    this.context.say(`${this.spec.name} runs again`)
  }

  /** SIGTERM, then SIGKILL when it takes too long; says which. */
  async stop() {
    this.stopping = true
    const child = this.process
    if (!child?.pid) return
    const gone = new Promise((resolve) => child.once('exit', () => resolve('ended')))
    child.kill('SIGTERM')
    const late = new Promise((resolve) =>
      setTimeout(() => resolve('late'), this.spec.stopWithinMs ?? 10_000).unref(),
    )
    if ((await Promise.race([gone, late])) === 'late') {
      this.context.say(
        `${this.spec.name} did not end within ${(this.spec.stopWithinMs ?? 10_000) / 1000} s: killed`,
      )
      child.kill('SIGKILL')
      await gone
    }
  }
}
