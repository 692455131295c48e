import type { Session } from '../../session/session.svelte.ts'

/** Scale and depth of the section at hand, as the tables want them. */
function place(session: Session): { mmPerPx: number | null; depthTop: number } {
  return { mmPerPx: session.section?.scale?.mmPerPx ?? null, depthTop: session.section?.depthTop ?? 0 }
}

/** The counted layers of the count at hand; probability 1 for certain boundaries, one half for doubtful ones. */
export async function layersCsv(session: Session): Promise<string> {
  const { layers } = session.counting
  const counted = [...layers.mark.keys()].filter((index) => layers.mark[index] < 2)
  return session.client.run('table', {
    table: 'layers',
    boundaries: counted.map((index) => ({
      position: layers.position[index],
      probability: layers.mark[index] === 0 ? 1 : 0.5,
      unseen: false,
    })),
    spans: session.spans.map(({ from, to, kind }) => ({ from, to, kind })),
    ...place(session),
  })
}

export async function profileCsv(session: Session): Promise<string> {
  const { profile, found } = session.detection
  if (!profile || !found) throw new Error('there is no profile yet')
  return session.client.run('table', { table: 'profile', profile, detrended: found.detrended, ...place(session) })
}

export async function chronologyCsv(session: Session): Promise<string> {
  const chronology = await session.chronology.now()
  return session.client.run('table', { table: 'chronology', chronology })
}
