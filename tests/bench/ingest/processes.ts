import fs from 'node:fs'

/** Clock ticks of a second in /proc (Linux, sysconf _SC_CLK_TCK). */
const ticksPerS = 100

export type Usage = { cpuS: number; memoryMb: number }

function statOf(pid: number): string[] | undefined {
  try {
    return fs.readFileSync(`/proc/${pid}/stat`, 'utf8').split(') ')[1]?.split(' ')
  } catch {
    return undefined
  }
}

function memoryMbOf(pid: number): number {
  try {
    // proportional share, so that PostgreSQL's shared buffers count once
    const smaps = fs.readFileSync(`/proc/${pid}/smaps_rollup`, 'utf8')
    return Number(/^Pss:\s+(\d+)/m.exec(smaps)?.[1] ?? 0) / 1024
  } catch {
    return 0
  }
}

/** CPU seconds so far and memory of a process, with those of its children where wanted (also the ended ones). */
export function usageOf(pid: number, withChildren = false): Usage {
  const pids = [pid]
  if (withChildren)
    for (const name of fs.readdirSync('/proc'))
      if (/^\d+$/.test(name) && statOf(Number(name))?.[1] === String(pid)) pids.push(Number(name))
  let ticks = 0
  let memoryMb = 0
  for (const each of pids) {
    const stat = statOf(each)
    if (!stat) continue
    ticks += Number(stat[11]) + Number(stat[12])
    if (each === pid && withChildren) ticks += Number(stat[13]) + Number(stat[14])
    memoryMb += memoryMbOf(each)
  }
  return { cpuS: ticks / ticksPerS, memoryMb }
}
