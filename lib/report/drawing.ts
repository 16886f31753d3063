import type { Bundle, Dot, StretchLayout, Text } from '@/lib/face/stretch'
import { printable } from './printable'

/** On paper: the same inks as by day, apart in shape and tone where no colour is printed. */
const INK = '#1b2a3a'
const SOFT = '#5b6672'
const FAINT = '#c9cdd1'
const SIDES = { a: '#3f6491', b: '#7d3c68' } as const
const GRAVE = '#c03a20'

/** The stretch view as vectors, `width` points wide, its upper left corner at (x, y). @returns its height, points */
export function drawStretch(
  doc: PDFKit.PDFDocument,
  layout: StretchLayout,
  { x, y, width }: { x: number; y: number; width: number },
): number {
  const scale = width / layout.width
  doc.save()
  doc.translate(x, y).scale(scale)
  doc.lineWidth(0.8).strokeColor(FAINT)
  for (const { top } of layout.lanes.slice(1)) doc.moveTo(0, top).lineTo(layout.width, top).stroke()
  if (layout.parking) doc.moveTo(layout.parking.left, 0).lineTo(layout.parking.left, layout.height).stroke()
  if (layout.faint) doc.path(layout.faint).stroke()
  for (const { path, thickness, lost } of layout.taut) {
    doc.path(path).lineWidth(lost ? 1.75 : thickness)
    if (lost) doc.dash(2, { space: 4 }).strokeColor(GRAVE).stroke().undash()
    else doc.strokeColor(INK).stroke()
  }
  if (layout.bundle) drawBundle(doc, layout.bundle)
  for (const dot of layout.dots) drawDot(doc, dot)
  doc.font('Helvetica').fillColor(SOFT)
  const narrow = layout.width < 640
  for (const { label, top, height } of layout.lanes)
    plain(doc, label, { x: 0, y: narrow ? top + 4 : top + height / 2 - 6, size: 13 })
  for (const { tag } of layout.taut) if (tag) drawTag(doc, tag, INK)
  if (layout.bundle) drawTag(doc, layout.bundle.tag, layout.bundle.lost ? GRAVE : INK)
  for (const name of layout.names) placed(doc, name, { size: 11, colour: SOFT })
  if (layout.parking) placed(doc, layout.parking.label, { size: 11, colour: SOFT })
  doc.restore()
  return layout.height * scale
}

function drawBundle(doc: PDFKit.PDFDocument, { brackets, strands, lost }: Bundle): void {
  doc.lineWidth(1.5).strokeColor(lost ? GRAVE : INK)
  for (const path of brackets) doc.path(path).stroke()
  if (lost) doc.dash(2, { space: 4 })
  for (const path of strands) doc.path(path).stroke()
  doc.undash()
}

function drawDot(doc: PDFKit.PDFDocument, { x, y, radius: r, side, shape, unheard }: Dot): void {
  const colour = side ? SIDES[side] : INK
  if (shape === 'round') doc.circle(x, y, r)
  else doc.rect(x - r, y - r, 2 * r, 2 * r)
  if (!unheard) doc.fill(colour)
  else doc.dash(2.5, { space: 1.75 }).lineWidth(1.75).fillAndStroke('#ffffff', colour).undash()
}

function drawTag(doc: PDFKit.PDFDocument, text: Text, colour: string): void {
  const { left, right, top, bottom } = text.box
  doc.rect(left, top, right - left, bottom - top).fill('#ffffff')
  placed(doc, text, { size: 12, colour })
}

function placed(
  doc: PDFKit.PDFDocument,
  { x, y, text, anchor }: Text,
  { size, colour }: { size: number; colour: string },
): void {
  const shown = printable(text)
  doc.font('Helvetica').fontSize(size).fillColor(colour)
  const width = doc.widthOfString(shown)
  const left = anchor === 'middle' ? x - width / 2 : anchor === 'end' ? x - width : x
  plain(doc, shown, { x: left, y: y - size * 0.4, size })
}

function plain(
  doc: PDFKit.PDFDocument,
  text: string,
  { x, y, size }: { x: number; y: number; size: number },
): void {
  doc.fontSize(size).text(printable(text), x, y, { lineBreak: false })
}
