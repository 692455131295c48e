/**
 * Draws the demo core of Askelmere, an invented lake: photograph, radiograph, three counts and a few dates, all from one
 * seed and with the truth beside them. Run by `npm run draw-demo` from the project's folder.
 *
 * Writes
 * - sample-images/scans/askelmere-1.jpg: line-scan photograph, 0.05 mm a pixel, young end left, ruler beside the core;
 * - sample-images/scans/askelmere-1-radiograph.tif: 16-bit grey radiograph of 150 to 350 mm, 0.1 mm a pixel;
 * - sample-images/scans/demo.json: what is known of the core (type DemoFacts); these three are shipped with the page;
 * - sample-images/truth/askelmere-1.json: boundaries, years, beds and crack (type Truth); not shipped;
 * - sample-images/tables/count-A.csv, count-B.csv, count-C.csv (`depth_mm,mark`) and dates.csv for the headless command.
 */
import { mkdir, writeFile } from 'node:fs/promises'
import { join } from 'node:path'
import sharp from 'sharp'
import type { DemoFacts } from '../src/document/demoFacts.ts'
import type { Point, ScanPixels } from '../worker/units.ts'
import { columnsOf, type Columns } from './columns.ts'
import { drawCounts } from './counters.ts'
import { inventedDates } from './dates.ts'
import { layout } from './deformation.ts'
import { drawPhotograph, type Picture } from './photograph.ts'
import { drawRadiograph, radiographShrink } from './radiograph.ts'
import { coringYear, drawRecord, recordSeed } from './record.ts'
import { erosiveBases, mmPerPx, truthOf, type Truth } from './truth.ts'

const folder = 'sample-images'
const photographFile = 'askelmere-1.jpg'
const radiographFile = 'askelmere-1-radiograph.tif'
/** Pixels of the core's upper end that are on the photograph: 465.7 mm. */
const width = 9314
const radiographFrom = 3000
const radiographTo = 7000
/** A boundary lies inside it. */
const crack = { from: 7416, to: 7425 }

/** A JFIF header that states 508 pixels an inch (0.05 mm a pixel); the encoder writes none of its own. */
const jfif = Uint8Array.from([0xff, 0xe0, 0, 16, 0x4a, 0x46, 0x49, 0x46, 0, 1, 2, 1, 0x01, 0xfc, 0x01, 0xfc, 0, 0])

async function writePhotograph(picture: Picture): Promise<void> {
  const { width, height } = picture
  const bytes = Uint8Array.from(picture.rgb, (value) => Math.min(255, Math.max(0, Math.round(value))))
  const encoded = await sharp(bytes, { raw: { width, height, channels: 3 } })
    .jpeg({ quality: 85 })
    .toBuffer()
  const afterStart = encoded.subarray(2)
  await writeFile(join(folder, 'scans', photographFile), Buffer.concat([encoded.subarray(0, 2), jfif, afterStart]))
}

async function writeRadiograph(columns: Columns, truthBases: ReturnType<typeof erosiveBases>): Promise<void> {
  const { width, height, grey } = drawRadiograph(columns, truthBases, radiographFrom, radiographTo)
  await sharp(grey, { raw: { width, height, channels: 1 } })
    .toColourspace('grey16')
    .tiff({ compression: 'lzw', predictor: 'horizontal', xres: 10, yres: 10, resolutionUnit: 'cm' })
    .toFile(join(folder, 'scans', radiographFile))
}

function factsOf(truth: Truth, counts: DemoFacts['counts']): DemoFacts {
  const point = (x: number): Point => ({ x: x as ScanPixels, y: layout.middle as ScanPixels })
  return {
    core: { name: 'ASK19-1', lake: 'Askelmere', coringYear, topIntact: true, topYearOpen: true },
    section: {
      name: 'ASK19-1',
      file: photographFile,
      orientation: { axis: 'x', young: 'low' },
      mmPerPx,
      depthTop: 0,
      transect: { points: [point(0), point(truth.width)], width: 320 as ScanPixels, tilt: null, masks: [] },
    },
    spans: truth.events.map((event) => ({
      from: Math.round(event.from * 10) / 10,
      to: Math.round(event.to * 10) / 10,
      kind: 'event',
      note: event.name,
    })),
    counts,
    dates: inventedDates(truth),
    companions: [
      {
        name: 'ASK19-1 radiograph',
        file: radiographFile,
        note: 'radiograph of 150 to 350 mm',
        orientation: { axis: 'x', young: 'low' },
        mmPerPx: mmPerPx * radiographShrink,
        depthTop: radiographFrom * mmPerPx,
      },
    ],
  }
}

async function writeTables(facts: DemoFacts): Promise<void> {
  for (const count of facts.counts) {
    const rows = count.position.map((at, i) => `${(at * mmPerPx).toFixed(3)},${count.mark[i]}\n`)
    await writeFile(join(folder, 'tables', `count-${count.counter}.csv`), `depth_mm,mark\n${rows.join('')}`)
  }
  const dates = facts.dates.map((d) => `${d.id},${d.kind},${d.topMm},${d.baseMm},${d.value},${d.sigma},0,0\n`)
  const header = 'id,kind,top_mm,base_mm,value,sigma,offset,offset_sigma\n'
  await writeFile(join(folder, 'tables', 'dates.csv'), header + dates.join(''))
}

const record = drawRecord(recordSeed)
const columns = columnsOf(record)
const bases = erosiveBases(record)
const truth = truthOf(record, photographFile, width, crack)
const facts = factsOf(truth, drawCounts(record, truth, 421))
for (const name of ['scans', 'truth', 'tables']) await mkdir(join(folder, name), { recursive: true })
await writePhotograph(drawPhotograph(columns, bases, width, crack))
await writeRadiograph(columns, bases)
await writeFile(join(folder, 'scans', 'demo.json'), `${JSON.stringify(facts)}\n`)
await writeFile(join(folder, 'truth', 'askelmere-1.json'), `${JSON.stringify(truth)}\n`)
await writeTables(facts)
console.log(`${truth.boundaries.length} varve years drawn, ${width} x ${layout.height} px`)
