import { Session } from './session.svelte.ts'
import { WorkerClient, startWorker } from './workerClient.ts'

/** The page's session, with its worker started. */
export function openSession(): Session {
  const kept = new Map<string, { file: Blob; name: string }>()
  const client = new WorkerClient(startWorker, (words) =>
    session.notices.trouble(`The worker stopped and was started again: ${words}.`),
  )
  const session = new Session(client, {
    keep: (sha256, file, name) => Promise.resolve(void kept.set(sha256, { file, name })),
    find: (sha256) => Promise.resolve(kept.get(sha256) ?? null),
  })
  return session
}
