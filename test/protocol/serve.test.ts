import { describe, expect, it } from 'vitest'
import { Fault } from '../../worker/check.ts'
import { perform, serve } from '../../worker/dispatch.ts'
import type { ScanShelf } from '../../worker/dispatch.ts'
import { samplesOf } from '../../worker/core/scan.ts'
import { defaultRecipe } from '../../worker/core/recipe.ts'
import type { FromWorker, Request, ToWorker } from '../../worker/protocol.ts'
import type { Scan, ScanInfo } from '../../worker/reading/scanFile.ts'
import { scanPixels } from '../../worker/units.ts'
import { WorkerClient } from '../../src/session/workerClient.ts'
import type { Port } from '../../src/session/workerClient.ts'

const width = 40
const height = 600
const data = Uint8Array.from(
  { length: width * height },
  (_, i) => 120 + Math.round(60 * Math.sin((Math.floor(i / width) * 2 * Math.PI) / 15)),
)
const info: ScanInfo = {
  sha256: 'a'.repeat(64),
  name: 'drawn.png',
  bytes: data.length,
  format: 'png',
  width,
  height,
  channels: 1,
  bits: 8,
  resolution: null,
  levels: [{ width, height, shrink: 1 }],
  notes: [],
}

function drawnShelf(): ScanShelf {
  const scan: Scan = {
    info,
    readRegion: (region) => {
      const whole = samplesOf(data, width, height, 1)
      const part = whole.lo(region.y, region.x, 0).hi(region.height, region.width, 1)
      return Promise.resolve(part)
    },
    close: () => undefined,
  }
  return {
    open: () => Promise.resolve(scan),
    get: (sha256) => {
      if (sha256 !== info.sha256)
        throw new Fault('conflict', 'scan', sha256, 'this scan is not open; open its file again')
      return scan
    },
    close: () => undefined,
  }
}

const profileRequest: Request<'profile'> = {
  scan: info.sha256,
  transect: {
    points: [
      { x: scanPixels(20), y: scanPixels(0) },
      { x: scanPixels(20), y: scanPixels(height) },
    ],
    width: scanPixels(20),
    tilt: 0,
    masks: [],
  },
  recipe: defaultRecipe.profile,
}

/** A worker in this thread: the same `serve`, messages through the event loop. */
function localPort(shelf: ScanShelf, log: FromWorker[] = []): Port {
  const port: Port = { postMessage: () => undefined, terminate: () => undefined, onmessage: null, onerror: null }
  const receive = serve((message) => {
    log.push(message)
    setImmediate(() => port.onmessage?.({ data: message }))
  }, shelf)
  port.postMessage = (message: ToWorker) => void setImmediate(() => receive(message))
  return port
}

const finals = (log: FromWorker[], job: number) =>
  log.filter((message) => message.type !== 'ready' && message.type !== 'progress' && message.job === job)

describe('jobs', () => {
  it('give the same reply when performed directly and through the protocol', async () => {
    const direct = await perform('profile', profileRequest, { shelf: drawnShelf() })
    const client = new WorkerClient(() => localPort(drawnShelf()))
    const sent = await client.run('profile', profileRequest)
    expect(sent).toEqual(direct)
    expect(direct.intensity.length).toBe(height)
  })

  it('end in exactly one final message, done, failed or cancelled', async () => {
    const log: FromWorker[] = []
    const receive = serve((message) => log.push(message), drawnShelf())
    receive({ type: 'run', job: 1, kind: 'profile', request: profileRequest })
    receive({ type: 'run', job: 2, kind: 'profile', request: { ...profileRequest, scan: 'b'.repeat(64) } })
    receive({ type: 'run', job: 3, kind: 'profile', request: profileRequest })
    receive({ type: 'cancel', job: 3 })
    receive({ type: 'cancel', job: 99 })
    await new Promise((resolve) => setTimeout(resolve, 300))
    expect(finals(log, 1).map(({ type }) => type)).toEqual(['done'])
    expect(finals(log, 2)).toMatchObject([
      { type: 'failed', failure: { code: 'conflict', message: 'this scan is not open; open its file again' } },
    ])
    expect(finals(log, 3).map(({ type }) => type)).toEqual(['cancelled'])
  })

  it('name the job that there is not', async () => {
    await expect(perform('weigh' as 'tile', {} as Request<'tile'>, { shelf: drawnShelf() })).rejects.toThrow(
      /there is no job of the kind "weigh"; known: defaultRecipe, openScan/,
    )
  })

  it('are overtaken by a newer one in the same slot, and only by that', async () => {
    const client = new WorkerClient(() => localPort(drawnShelf()))
    const older = client.run('profile', profileRequest, { slot: 'profile' })
    const other = client.run('stretch', { scan: info.sha256 })
    const newer = client.run('profile', profileRequest, { slot: 'profile' })
    await expect(older).rejects.toThrow('cancelled')
    expect((await newer).intensity.length).toBe(height)
    expect(await other).toMatchObject({ channel: 'colour' })
  })

  it('are rejected when the worker crashes, and the next ones find their scans open again', async () => {
    const opened: string[] = []
    const ports: Port[] = []
    const crashes: string[] = []
    const client = new WorkerClient(
      () => {
        const shelf = drawnShelf()
        const port = localPort({
          ...shelf,
          open: (source, name, ...rest) => {
            opened.push(name)
            return shelf.open(source, name, ...rest)
          },
        })
        ports.push(port)
        return port
      },
      (words) => crashes.push(words),
    )
    await client.run('openScan', { file: new Blob([]), name: 'drawn.png' })
    const lost = client.run('profile', profileRequest)
    ports[0].onerror?.({ message: 'out of memory' })
    await expect(lost).rejects.toThrow(
      'the worker stopped (out of memory) and was started again; nothing you marked is lost',
    )
    expect(crashes).toEqual(['out of memory'])
    expect((await client.run('profile', profileRequest)).intensity.length).toBe(height)
    expect(opened).toEqual(['drawn.png', 'drawn.png'])
  })
})
