import { describe, expect, it } from 'vitest'
import { canvasSurface, prepareCanvas } from '../../../src/view/canvasSurface.ts'

type Call = [name: string, ...values: unknown[]]

/** A canvas context that notes what it is asked to do; a letter is as wide as half its size. */
function notingContext(): { context: CanvasRenderingContext2D; calls: Call[] } {
  const calls: Call[] = []
  const state: Record<string, unknown> = {}
  const context = new Proxy(state, {
    get: (_, name: string) => {
      if (name === 'measureText')
        return (text: string) => ({ width: text.length * parseFloat(String(state.font)) * 0.5 })
      return name in state ? state[name] : (...values: unknown[]) => void calls.push([name, ...values])
    },
    set: (_, name: string, value: unknown) => {
      state[name] = value
      calls.push([`${name} =`, value])
      return true
    },
  })
  return { context: context as unknown as CanvasRenderingContext2D, calls }
}

const numbersOf = (calls: Call[], name: string) =>
  calls.filter(([called]) => called === name).map(([, ...values]) => values as number[])
const pen = { colour: '#000000', width: 1 }

describe('hairlines on a canvas', () => {
  it.each([
    [1, 1],
    [2, 1],
    [1.5, 4 / 3],
    [3, 1],
  ])(
    'cover whole device pixels at a ratio of %s, no farther than half of one from where they belong',
    (ratio, width) => {
      const { context, calls } = notingContext()
      canvasSurface(context, ratio, 'sans-serif').line(3.2, 10.3, 20.7, 10.3, pen)
      const [, at] = numbersOf(calls, 'moveTo')[0]
      const lineWidth = calls.find(([name]) => name === 'lineWidth =')?.[1] as number
      expect(lineWidth).toBeCloseTo(width, 9)
      expect(Math.abs(at - 10.3) * ratio).toBeLessThanOrEqual(0.5 + 1e-9)
      const edge = (at - lineWidth / 2) * ratio
      expect(Math.abs(edge - Math.round(edge))).toBeLessThan(1e-9)
    },
  )

  it('leaves sloping lines where they are', () => {
    const { context, calls } = notingContext()
    canvasSurface(context, 1, 'sans-serif').line(3.2, 10.3, 20.7, 11.9, pen)
    expect(numbersOf(calls, 'moveTo')).toEqual([[3.2, 10.3]])
    expect(numbersOf(calls, 'lineTo')).toEqual([[20.7, 11.9]])
  })
})

describe('tiles on a canvas', () => {
  it('meet on one device pixel, without a seam between them', () => {
    const { context, calls } = notingContext()
    const surface = canvasSurface(context, 1.25, 'sans-serif')
    const picture = { width: 512, height: 512, source: {} as ImageBitmap }
    const part = { x: 0, y: 0, width: 512, height: 512 }
    for (let k = 0; k < 5; k++)
      surface.image(picture, part, { x: 0, y: 17.37 + k * 61.73, width: 200, height: 61.73 }, true)
    const drawn = calls.filter(([name]) => name === 'drawImage').map((call) => call.slice(-4) as number[])
    expect(drawn.length).toBe(5)
    for (let k = 1; k < 5; k++) expect(drawn[k][1]).toBeCloseTo(drawn[k - 1][1] + drawn[k - 1][3], 9)
  })
})

describe('text on a canvas', () => {
  it('is centred over all its runs together, gaps included', () => {
    const { context, calls } = notingContext()
    const label = [{ text: 'Depth' }, { text: 'mm', size: 8, gap: 5 }]
    canvasSurface(context, 1, 'sans-serif').text(label, 100, 20, { size: 10, colour: '#111111', anchor: 'middle' })
    // 25 for the word, 5 for the gap, 8 for the unit.
    expect(numbersOf(calls, 'fillText').map(([text, x]) => [text, x])).toEqual([
      ['Depth', 81],
      ['mm', 111],
    ])
  })
})

describe('a canvas made ready', () => {
  it('has as many pixels as the screen, and keeps its memory while its size stays', () => {
    const { context } = notingContext()
    let resized = 0
    const canvas = {
      getContext: () => context,
      get width() {
        return 450
      },
      set width(_: number) {
        resized++
      },
      height: 0,
    } as unknown as HTMLCanvasElement
    prepareCanvas(canvas, 300, 200, 1.5, 'sans-serif')
    expect(resized).toBe(0)
    expect(canvas.height).toBe(300)
  })

  it('is refused where the browser gives no context', () => {
    const canvas = { getContext: () => null, width: 0, height: 0 } as unknown as HTMLCanvasElement
    expect(prepareCanvas(canvas, 300, 200, 1, 'sans-serif')).toBe(null)
  })
})
