import { Fault } from './check.ts'
import { agesTable } from './core/ageTables.ts'
import { compareCounts } from './core/counts.ts'
import { buildChronology } from './core/chronology.ts'
import { readCountTable } from './core/countTable.ts'
import { parseCurve } from './core/curveFile.ts'
import { calibrate } from './core/calibrate.ts'
import { coreWiggle } from './core/coreWiggle.ts'
import { CurveShelf } from './core/curveShelf.ts'
import { readDatesTable } from './core/datesTable.ts'
import { coreSamples, coreYearsBetween, dateCore } from './core/dating.ts'
import { lead210Ages } from './core/lead210.ts'
import { layersOfCount } from './core/layersOfCount.ts'
import { paintSamples, stretchedDisplay } from './core/display.ts'
import { runCount } from './core/ladder.ts'
import { extractProfile } from './core/profile.ts'
import { runningMean, thicknessSummary } from './core/rates.ts'
import { defaultRecipe } from './core/recipe.ts'
import { uprightView } from './core/scan.ts'
import { chronologyTable, layerRows, layersTable, profileTable } from './core/tables.ts'
import type { Scan } from './reading/scanFile.ts'
import { protocolVersion } from './protocol.ts'
import type { Failure, FromWorker, JobKind, Reply, Request, ToWorker } from './protocol.ts'
import type { Progress, RegionWanted, Samples, ScanWork, Work } from './work.ts'

/** The open scans of one worker or one command, by SHA-256. Opening knows the platform; the rest does not. */
export interface ScanShelf {
  open(
    source: Blob | string,
    name: string,
    onProgress: (progress: Progress) => void,
    signal: AbortSignal,
  ): Promise<Scan>
  /** Throws a Fault for a scan that was never opened. */
  get(sha256: string): Scan
  close(sha256: string): void
}

/** What a job may use while it runs. */
export interface Circumstances {
  shelf: ScanShelf
  onProgress?: (progress: Progress) => void
  signal?: AbortSignal
}

/** Thrown inside a job whose signal was raised; it ends as `cancelled`, never as `failed`. */
export class Cancelled extends Error {}

/** How long a computation holds its thread before messages (a cancel among them) are let in, milliseconds. */
const sliceMilliseconds = 50

type Handler<K extends JobKind> = (
  request: Request<K>,
  circumstances: Required<Circumstances>,
) => Promise<Reply<K>> | Reply<K>

const handlers: { [K in JobKind]: Handler<K> } = {
  defaultRecipe: () => structuredClone(defaultRecipe),
  async openScan({ file, name }, { shelf, onProgress, signal }) {
    return (await shelf.open(file, name, onProgress, signal)).info
  },
  closeScan({ scan }, { shelf }) {
    shelf.close(scan)
    return null
  },
  async stretch({ scan }, { shelf }) {
    const open = shelf.get(scan)
    const level = open.info.levels.length - 1
    const { width, height } = open.info.levels[level]
    return stretchedDisplay(await open.readRegion({ x: 0, y: 0, width, height }, level), open.info.bits)
  },
  async tile({ scan, level, region, orientation, display }, { shelf }) {
    const open = shelf.get(scan)
    const upright = uprightView(await open.readRegion(region, level), orientation)
    const [height, width] = upright.shape as [number, number]
    return { width, height, rgba: paintSamples(upright, display, open.info.bits) }
  },
  countTable: ({ text, name, columns }) => readCountTable(text, name, columns),
  agreement: ({ counts, options }, circumstances) => drive(compareCounts(counts, options), circumstances),
  chronology: (request) => buildChronology(request),
  layersOfCount: (request) => layersOfCount(request),
  date: (request, circumstances) => drive(dateCore(request), circumstances),
  yearsBetween: ({ dating, upper, lower }, circumstances) =>
    drive(coreYearsBetween(dating, upper, lower), circumstances),
  sampleYears: ({ dating, samples, seed }, circumstances) => drive(coreSamples(dating, samples, seed), circumstances),
  wiggle: (request) => coreWiggle(request),
  calibrate: ({ date, curves, curve }) => calibrate(date, new CurveShelf(curves).curve(curve ?? undefined)),
  datesTable: ({ text, name }) => readDatesTable(text, name),
  lead210: (request) => lead210Ages(request),
  curve: ({ text, name, sha256 }) => parseCurve(text, { name, sha256 }),
  thickness: ({ thickness, window }) => ({
    summary: thicknessSummary(thickness),
    mean: runningMean(thickness, window),
  }),
  table(request) {
    switch (request.table) {
      case 'layers':
        return layersTable(layerRows(request.boundaries, request.spans), request.mmPerPx, request.depthTop)
      case 'profile':
        return profileTable(request.profile, request.detrended, request.mmPerPx, request.depthTop)
      case 'chronology':
        return chronologyTable(request.chronology)
      case 'ages':
        return agesTable(request.names, request.depth, request.ages)
    }
  },
  profile({ scan, transect, recipe }, circumstances) {
    const open = circumstances.shelf.get(scan)
    return driveOnScan(extractProfile(open.info, transect, recipe), open, circumstances)
  },
  ladder({ profile, spans, fixed, recipe }, circumstances) {
    return drive(runCount(profile, spans, fixed, recipe), circumstances)
  },
}

/** Performs one job; the same in the page's worker, in the headless command and in a test. */
export async function perform<K extends JobKind>(
  kind: K,
  request: Request<K>,
  circumstances: Circumstances,
): Promise<Reply<K>> {
  if (!Object.hasOwn(handlers, kind)) {
    throw new Fault(
      'argument',
      'kind',
      kind,
      `there is no job of the kind ${JSON.stringify(kind)}; known: ${Object.keys(handlers).join(', ')}`,
    )
  }
  return handlers[kind](request, {
    onProgress: () => undefined,
    signal: new AbortController().signal,
    ...circumstances,
  })
}

/** Drives a computation in slices; raises Cancelled at the first yield after the signal. */
function drive<Result>(work: Work<Result>, circumstances: Required<Circumstances>): Promise<Result> {
  return driveOnScan(work, null, circumstances)
}

async function driveOnScan<Result>(
  work: ScanWork<Result> | Work<Result>,
  scan: Scan | null,
  { onProgress, signal }: Required<Circumstances>,
): Promise<Result> {
  const running = work as ScanWork<Result>
  let sliceStart = performance.now()
  let samples: Samples | undefined
  for (;;) {
    if (signal.aborted) throw new Cancelled('cancelled')
    const step = running.next(samples)
    samples = undefined
    if (step.done) return step.value
    if (isRegionWanted(step.value)) {
      if (!scan) throw new Fault('internal', 'scan', null, 'a computation asked for a region, but it runs on no scan')
      samples = await scan.readRegion(step.value.read)
    } else {
      onProgress(step.value)
    }
    if (performance.now() - sliceStart > sliceMilliseconds) {
      await letMessagesIn()
      sliceStart = performance.now()
    }
  }
}

function isRegionWanted(value: Progress | RegionWanted): value is RegionWanted {
  return 'read' in value
}

/** One turn of the event loop without the 4 ms that browsers add to nested timers. */
function letMessagesIn(): Promise<void> {
  return new Promise((resolve) => {
    const { port1, port2 } = new MessageChannel()
    port1.onmessage = () => {
      port1.close()
      resolve()
    }
    port2.postMessage(null)
  })
}

/** What a page is told of an error: a Fault in its own words, anything else as our mistake. */
export function failureOf(error: unknown): Failure {
  if (error instanceof Fault) {
    return { code: error.code, field: error.field, value: error.value, message: error.message }
  }
  const words = error instanceof Error ? error.message : String(error)
  return {
    code: 'internal',
    field: '',
    value: '',
    message: `Winterclay made a mistake: ${words}. Nothing was changed; please report it.`,
  }
}

/**
 * Serves jobs over a port: `receive` takes each message; `post` is called with `ready` at once and then with progress
 * and exactly one final message for each job. Replies are handed over (transferred), not copied.
 */
export function serve(
  post: (message: FromWorker, transfer: Transferable[]) => void,
  shelf: ScanShelf,
): (message: ToWorker) => void {
  const running = new Map<number, AbortController>()
  post({ type: 'ready', protocol: protocolVersion }, [])

  async function run(job: number, kind: JobKind, request: Request<JobKind>): Promise<void> {
    const abort = new AbortController()
    running.set(job, abort)
    const onProgress = (progress: Progress) => {
      if (!abort.signal.aborted) post({ type: 'progress', job, progress }, [])
    }
    let final: FromWorker
    try {
      const reply = await perform(kind, request, { shelf, onProgress, signal: abort.signal })
      final = abort.signal.aborted ? { type: 'cancelled', job } : { type: 'done', job, reply }
    } catch (error) {
      final = abort.signal.aborted ? { type: 'cancelled', job } : { type: 'failed', job, failure: failureOf(error) }
    }
    running.delete(job)
    post(final, final.type === 'done' ? buffersOf(final.reply) : [])
  }

  return (message) => {
    if (message.type === 'cancel') running.get(message.job)?.abort()
    else void run(message.job, message.kind, message.request)
  }
}

/** All array buffers inside a reply, each once. */
function buffersOf(value: unknown, found = new Set<ArrayBuffer>()): ArrayBuffer[] {
  if (ArrayBuffer.isView(value)) {
    if (value.buffer instanceof ArrayBuffer) found.add(value.buffer)
  } else if (
    Array.isArray(value) ||
    (value !== null && typeof value === 'object' && Object.getPrototypeOf(value) === Object.prototype)
  ) {
    for (const part of Object.values(value)) buffersOf(part, found)
  }
  return [...found]
}
