import { spawn } from 'node:child_process'
import { readFileSync, rmSync } from 'node:fs'
import type { Answer } from './answer'
import type { TruthBuilding } from './building'
import { writeBuilding } from './files'

/** The command that outsiders use, started as they start it but for the package manager. */
const COMMAND = ['--import', 'tsx', 'ingest/analyse/main.ts']

export type Run = { answers: Answer[]; seconds: number; stderr: string }

/** Hands a building's files to the analyse command and reads back what it says. */
export async function analyseByCommand(
  building: TruthBuilding,
  folder: string,
  keepFiles = false,
): Promise<Run> {
  const files = writeBuilding(building, folder)
  const args = [...COMMAND, '--rooms', files.rooms, '--readings', files.readings, '--out', files.out]
  if (files.outdoor) args.push('--outdoor', files.outdoor)
  const startMs = performance.now()
  const child = spawn(process.execPath, args, { stdio: ['ignore', 'ignore', 'pipe'] })
  let stderr = ''
  child.stderr.on('data', (chunk) => {
    stderr += chunk
  })
  const code = await new Promise<number | null>((done) => child.on('close', done))
  if (code !== 0) throw new Error(`analyse ended with ${code} on ${folder}:\n${stderr.slice(0, 2000)}`)
  const answers = JSON.parse(readFileSync(files.out, 'utf8')) as Answer[]
  if (!keepFiles) rmSync(folder, { recursive: true })
  return { answers, seconds: (performance.now() - startMs) / 1000, stderr }
}
