import { ScanStore } from './scanStore.ts'
import { Session } from './session.svelte.ts'
import { WorkerClient, startWorker } from './workerClient.ts'

/** The page's session, with its worker started and the browser's storage of scans behind it. */
export function openSession(): Session {
  let store: Promise<ScanStore> | null = null
  const opened = () => (store ??= ScanStore.open())
  const client = new WorkerClient(startWorker, (words) =>
    session.notices.trouble(`The worker stopped and was started again: ${words}.`),
  )
  const session = new Session(client, {
    keep: async (sha256, file, name) => (await opened()).keep(sha256, file, name),
    find: async (sha256) => (await opened()).find(sha256),
  })
  return session
}
