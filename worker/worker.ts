/// <reference lib="webworker" />
import { Fault } from './check.ts'
import { serve } from './dispatch.ts'
import type { ScanShelf } from './dispatch.ts'
import type { ToWorker } from './protocol.ts'
import { openScan } from './reading/openScan.ts'
import type { Scan } from './reading/scanFile.ts'

declare const self: DedicatedWorkerGlobalScope

const scans = new Map<string, Scan>()

const shelf: ScanShelf = {
  async open(source, name, onProgress, signal) {
    if (typeof source === 'string') throw new Fault('argument', 'file', source, 'the page opens files, not paths')
    const scan = await openScan(source, name, onProgress, signal)
    scans.get(scan.info.sha256)?.close()
    scans.set(scan.info.sha256, scan)
    return scan
  },
  get(sha256) {
    const scan = scans.get(sha256)
    if (!scan) throw new Fault('conflict', 'scan', sha256, 'this scan is not open; open its file again')
    return scan
  },
  close(sha256) {
    scans.get(sha256)?.close()
    scans.delete(sha256)
  },
}

const receive = serve((message, transfer) => self.postMessage(message, transfer), shelf)
self.onmessage = (event: MessageEvent<ToWorker>) => receive(event.data)
