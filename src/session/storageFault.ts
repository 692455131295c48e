import { Fault } from '../../worker/check.ts'

/** What went wrong with the browser's storage, in words for the person at the bench. `act` completes "the browser could not …". */
export function storageFault(error: unknown, act: string): Fault {
  if (error instanceof Fault) return error
  const name = error instanceof Error || error instanceof DOMException ? error.name : ''
  if (name === 'QuotaExceededError') {
    const message = `the browser could not ${act}: its storage is full. Free disk space, or save project files and remove projects you no longer need`
    return new Fault('too-large', 'storage', name, message)
  }
  if (name === 'InvalidStateError' || name === 'AbortError' || name === 'UnknownError') {
    const message = `the browser could not ${act}: its storage was closed or is damaged (${name}). Save a project file, then reload the page`
    return new Fault('unreadable', 'storage', name, message)
  }
  if (name === 'ConstraintError') {
    const message = `the browser could not ${act}: another tab has stored something in its place. Save a project file, then reload the page`
    return new Fault('conflict', 'storage', name, message)
  }
  if (name === 'SecurityError' || name === 'NotAllowedError') {
    const message = `the browser could not ${act}: it allows this page no storage (private window or blocked site data). Save a project file before closing`
    return new Fault('unsupported', 'storage', name, message)
  }
  const words = error instanceof Error ? error.message : String(error)
  return new Fault('internal', 'storage', name, `the browser could not ${act}: ${words}`)
}
