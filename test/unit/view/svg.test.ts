import sharp from 'sharp'
import { describe, expect, it } from 'vitest'
import { exportSvg, inlineSvg, withResolution } from '../../../src/view/exportPlot.ts'
import { withUnit } from '../../../src/view/labels.ts'
import type { Painter } from '../../../src/view/surface.ts'
import { escapeXml, svgSurface } from '../../../src/view/svgSurface.ts'
import { lightTheme } from '../../../src/view/theme.ts'
import { elementsOf } from './wellFormed.ts'

const pen = { colour: '#000000', width: 1 }

describe('the check of well-formedness', () => {
  it.each([
    ['<a><b></a></b>', '</a> closes nothing'],
    ['<a>', 'not closed: a'],
    ['<a x="1" x="2"/>', 'an attribute stands twice'],
    ['<a>R & D</a>', 'bare &'],
    ['<a x=1/>', 'not well-formed at: <a x=1/>'],
  ])('refuses %s', (xml, message) => {
    expect(() => elementsOf(xml)).toThrow(message)
  })
})

describe('figures in SVG', () => {
  it('escape every text and every attribute', () => {
    const surface = svgSurface()
    surface.text('Höfn & <b>"sons"</b>', 1, 2, { size: 10, colour: '"><script>' })
    surface.group('"><script>alert(1)</script>', () => surface.line(0, 0, 1, 1, pen))
    const markup = surface.markup()
    expect(elementsOf(`<svg>${markup}</svg>`)).toEqual(['svg', 'text', 'g', 'line'])
    expect(markup).toContain('Höfn &amp; &lt;b&gt;&quot;sons&quot;&lt;/b&gt;')
  })

  it('leave out what XML cannot hold', () => {
    expect(escapeXml('a\u0000b\u001fc\ud800d\u{1f30d}\te')).toBe('abcd\u{1f30d}\te')
  })

  it('lift the pen at NaN and write numbers to a hundredth', () => {
    const surface = svgSurface()
    surface.polyline([0, 0, 1.23456, 2, NaN, NaN, 5, 5, 6, 6.999], pen)
    expect(surface.markup()).toContain('d="M0 0L1.23 2M5 5L6 7"')
  })

  it('write nothing for lines without ends', () => {
    const surface = svgSurface()
    surface.lines([], pen)
    surface.polyline([NaN, NaN], pen)
    expect(surface.markup()).toBe('')
  })

  it('define each texture and each clip once, under ids that several figures on a page do not share', () => {
    const surface = svgSurface('fig2-')
    const frame = { x: 0, y: 0, width: 10, height: 10 }
    for (let i = 0; i < 3; i++) {
      surface.texture(frame, 'hatch', '#333333')
      surface.clip(frame, () => surface.rect(frame, { fill: '#ffffff' }))
    }
    const ids = Array.from(surface.markup().matchAll(/ id="([^"]*)"/g), (match) => match[1])
    expect(ids).toEqual(['fig2-hatch-333333', 'fig2-clip1'])
    for (const use of surface.markup().matchAll(/url\(#([^)]*)\)/g)) expect(ids).toContain(use[1])
    expect(() => elementsOf(`<svg>${surface.markup()}</svg>`)).not.toThrow()
  })

  it('set units small and quiet', () => {
    const surface = svgSurface()
    surface.text(withUnit('Depth', 'mm', 12, '#555555'), 0, 0, { size: 12, colour: '#000000' })
    expect(surface.markup()).toContain('Depth<tspan dx="5.4" font-size="10.32" fill="#555555">mm</tspan>')
  })

  it('show a part of a picture through a clip', () => {
    const surface = svgSurface()
    const picture = { width: 100, height: 50, href: 'data:image/png;base64,AAAA' }
    surface.image(picture, { x: 50, y: 0, width: 50, height: 50 }, { x: 10, y: 10, width: 25, height: 25 }, false)
    const markup = surface.markup()
    expect(elementsOf(`<svg>${markup}</svg>`)).toEqual(['svg', 'defs', 'clipPath', 'rect', 'g', 'image'])
    expect(markup).toContain('<image x="-15" y="10" width="50" height="25"')
    expect(markup).toContain('image-rendering="pixelated"')
  })
})

const cross: Painter<{ label: string }> = (surface, frame, data, theme) => {
  surface.line(frame.x, frame.y, frame.x + frame.width, frame.y + frame.height, { colour: theme.ink, width: 1 })
  surface.text(data.label, frame.width / 2, frame.height / 2, { size: theme.size.text, colour: theme.ink })
}

describe('the export', () => {
  it('has its size in millimetres and its type in points', () => {
    const svg = exportSvg(cross, { label: 'a' }, { width: 254, height: 127 }, { title: 'Count & error' })
    expect(svg).toContain('width="254mm" height="127mm" viewBox="0 0 960 480"')
    expect(svg).toContain('<title>Count &amp; error</title>')
    expect(svg).toContain('font-family="sans-serif"')
    expect(elementsOf(svg)).toEqual(['svg', 'title', 'rect', 'line', 'text'])
  })

  it('is the same text for the same data', () => {
    const once = () => exportSvg(cross, { label: 'a' }, { width: 80, height: 60 })
    expect(once()).toBe(once())
  })

  it('is drawn by any SVG reader', async () => {
    const svg = exportSvg(cross, { label: 'R & D' }, { width: 50.8, height: 25.4 })
    const { data, info } = await sharp(Buffer.from(svg)).removeAlpha().raw().toBuffer({ resolveWithObject: true })
    // sharp draws at 72 dots per inch unless told otherwise: two inches by one.
    expect([info.width, info.height]).toEqual([144, 72])
    expect(data.reduce((least, value) => Math.min(least, value), 255)).toBeLessThan(100)
  })

  it('for the page, has CSS pixels and the type of the page', () => {
    const svg = inlineSvg(cross, { label: 'a' }, 300, 200, lightTheme, { title: 'Ages', prefix: 'x-' })
    expect(svg).toContain('viewBox="0 0 300 200"')
    expect(svg).toContain('aria-label="Ages"')
    expect(elementsOf(svg)).toEqual(['svg', 'line', 'text'])
  })

  it('writes the resolution into a PNG as an encoder would', async () => {
    const plain = await sharp({ create: { width: 3, height: 2, channels: 3, background: '#fff' } })
      .png()
      .toBuffer()
    const encoded = await sharp(plain).withMetadata({ density: 600 }).png().toBuffer()
    const marked = Buffer.from(withResolution(plain, 600))
    const chunk = (png: Buffer) => png.subarray(png.indexOf('pHYs') - 4, png.indexOf('pHYs') + 17).toString('hex')
    // Length, name, values and checksum of the chunk alike; its place is right after the header.
    expect(chunk(marked)).toBe(chunk(encoded))
    expect(marked.indexOf('pHYs')).toBe(8 + 25 + 4)
    const { density, width, height } = await sharp(marked).metadata()
    expect([density, width, height]).toEqual([600, 3, 2])
  })
})
