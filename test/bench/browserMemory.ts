import { readFileSync, readdirSync } from 'node:fs'

/** Resident memory of the Chromium whose command line holds `mark` and of all its processes, bytes. Linux only. */
export function browserMemory(mark: string): number {
  const processes = readdirSync('/proc')
    .filter((name) => /^\d+$/.test(name))
    .map(describeProcess)
  const tree = new Set(processes.filter(({ command }) => command.includes(mark)).map(({ pid }) => pid))
  for (let grown = true; grown;) {
    const children = processes.filter(({ pid, parent }) => tree.has(parent) && !tree.has(pid))
    for (const { pid } of children) tree.add(pid)
    grown = children.length > 0
  }
  // Shared pages are counted once for each process: the sum of what is private plus the largest shared part.
  const members = processes.filter(({ pid }) => tree.has(pid))
  return members.reduce((sum, { own }) => sum + own, 0) + Math.max(0, ...members.map(({ shared }) => shared))
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
}

function describeProcess(name: string): Process {
  const pid = Number(name)
  try {
    const status = readFileSync(`/proc/${name}/status`, 'utf8')
    const figure = (field: string) => Number(new RegExp(`${field}:\\s+(\\d+)`).exec(status)?.[1] ?? 0)
    const command = readFileSync(`/proc/${name}/cmdline`, 'utf8')
    return {
      pid,
      parent: figure('PPid'),
      command,
      own: figure('RssAnon') * 1024,
      shared: (figure('RssFile') + figure('RssShmem')) * 1024,
    }
  } catch {
    // It ended between the listing and the look.
    return { pid, parent: 0, command: '', own: 0, shared: 0 }
  }
}
