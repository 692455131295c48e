import { readFileSync, readdirSync } from 'node:fs'

/** Resident memory of the Chromium whose command line holds `mark` and of all its processes, bytes. Linux only. */
export function browserMemory(mark: string): number {
  const members = browserProcesses(mark)
  // Shared pages are counted once for each process: the sum of what is private plus the largest shared part.
  return members.reduce((sum, { own }) => sum + own, 0) + Math.max(0, ...members.map(({ shared }) => shared))
}

/** Processor seconds that this Chromium has used so far, over all its processes that still run. */
export function browserSeconds(mark: string): number {
  return browserProcesses(mark).reduce((sum, { seconds }) => sum + seconds, 0)
}

function browserProcesses(mark: string): Process[] {
  const processes = readdirSync('/proc')
    .filter((name) => /^\d+$/.test(name))
    .map(describeProcess)
  const tree = new Set(processes.filter(({ command }) => command.includes(mark)).map(({ pid }) => pid))
  for (let grown = true; grown;) {
    const children = processes.filter(({ pid, parent }) => tree.has(parent) && !tree.has(pid))
    for (const { pid } of children) tree.add(pid)
    grown = children.length > 0
  }
  return processes.filter(({ pid }) => tree.has(pid))
}

/** Calls `browserMemory` over and over until stopped; returns the highest value seen. */
export function watchMemory(mark: string): () => number {
  let highest = browserMemory(mark)
  const timer = setInterval(() => (highest = Math.max(highest, browserMemory(mark))), 100)
  return () => {
    clearInterval(timer)
    return Math.max(highest, browserMemory(mark))
  }
}

interface Process {
  pid: number
  parent: number
  command: string
  own: number
  shared: number
  seconds: number
}

function describeProcess(name: string): Process {
  const pid = Number(name)
  try {
    const status = readFileSync(`/proc/${name}/status`, 'utf8')
    const figure = (field: string) => Number(new RegExp(`${field}:\\s+(\\d+)`).exec(status)?.[1] ?? 0)
    // After the name in brackets, fields 14 and 15 are user and system time in hundredths of a second (proc(5)).
    const times = readFileSync(`/proc/${name}/stat`, 'utf8').split(') ')[1].split(' ')
    const seconds = (Number(times[11]) + Number(times[12])) / 100
    const command = readFileSync(`/proc/${name}/cmdline`, 'utf8')
    return {
      pid,
      parent: figure('PPid'),
      command,
      own: figure('RssAnon') * 1024,
      shared: (figure('RssFile') + figure('RssShmem')) * 1024,
      seconds,
    }
  } catch {
    // It ended between the listing and the look.
    return { pid, parent: 0, command: '', own: 0, shared: 0, seconds: 0 }
  }
}
