import { spawn } from 'node:child_process'
import path from 'node:path'

export type WorkerProcess = {
  pid: number
  output: () => string
  end: (signal: NodeJS.Signals) => Promise<number | NodeJS.Signals | null>
  ended: Promise<number | NodeJS.Signals | null>
}

/** Starts a real process of the ingest (`ingest/worker/main.ts`, `ingest/feeds/main.ts`) and waits until it says that it is ready. */
export async function startIngestMain(
  main: string,
  env: Record<string, string>,
  words: readonly string[] = [],
): Promise<WorkerProcess> {
  const child = spawn(process.execPath, ['--import', 'tsx', path.resolve(main), ...words], {
    env: { PATH: process.env.PATH, NODE_ENV: 'test', ...env },
    stdio: ['ignore', 'pipe', 'pipe', 'ipc'],
  })
  let output = ''
  for (const stream of [child.stdout, child.stderr])
    stream?.on('data', (chunk) => (output = `${output}${chunk}`.slice(-200_000)))
  const ended = new Promise<number | NodeJS.Signals | null>((resolve) =>
    child.once('exit', (code, signal) => resolve(signal ?? code)),
  )
  await new Promise<void>((resolve, reject) => {
    child.once('message', () => resolve())
    child.once('exit', () => reject(new Error(`${main} ended before it was ready:\n${output}`)))
  })
  return {
    pid: child.pid!,
    output: () => output,
    end: (signal) => {
      child.kill(signal)
      return ended
    },
    ended,
  }
}
