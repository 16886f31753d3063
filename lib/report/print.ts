import PDFDocument from 'pdfkit'
import { drawStretch } from './drawing'
import type { Part, Report, TableColumn } from './parts'
import { printable } from './printable'
import { stamp } from './times'

const MARGIN = 48
const INK = '#1b2a3a'
const SOFT = '#5b6672'
const RULE = '#b9bec4'
const TEXT_PT = 9.5
/** The 19 figures of a moment fit into a fifth of the width. */
const FIGURES_PT = 8

type Doc = PDFKit.PDFDocument

/** A4, with text that can be selected and searched. @returns the bytes of the PDF */
export async function printReport(
  { title, madeAt, parts }: Report,
  { compress = true }: { compress?: boolean } = {},
): Promise<Uint8Array> {
  const doc = new PDFDocument({
    size: 'A4',
    margin: MARGIN,
    compress,
    bufferPages: true,
    lang: 'en-GB',
    info: { Title: printable(title), Creator: 'Thinspan', CreationDate: madeAt },
  })
  const chunks: Buffer[] = []
  const whole = new Promise<Uint8Array>((resolve, reject) => {
    doc.on('data', (chunk: Buffer) => chunks.push(chunk))
    doc.on('end', () => resolve(Buffer.concat(chunks)))
    doc.on('error', reject)
  })
  for (const part of parts) put(doc, part)
  numberPages(doc, `${printable(title)}, made ${stamp(madeAt.getTime(), 'UTC')} UTC`)
  doc.end()
  return whole
}

function put(doc: Doc, part: Part): void {
  switch (part.is) {
    case 'title':
      doc.font('Helvetica').fontSize(10).fillColor(SOFT).text(printable(part.above))
      doc.moveDown(0.3).font('Helvetica-Bold').fontSize(19).fillColor(INK).text(printable(part.text))
      doc.moveDown(0.6)
      return
    case 'block':
      putTable(doc, BLOCK, part.rows)
      return
    case 'heading':
      keepTogether(doc, 70)
      doc.moveDown(0.9).font('Helvetica-Bold').fontSize(12.5).fillColor(INK)
      doc.text(printable(part.text), MARGIN).moveDown(0.35)
      return
    case 'text':
      doc.font('Helvetica').fontSize(TEXT_PT).fillColor(INK).text(printable(part.text), MARGIN)
      return
    case 'note':
      doc.moveDown(0.8).font('Helvetica').fontSize(8.5).fillColor(SOFT).text(printable(part.text), MARGIN)
      return
    case 'table':
      if (part.rows.length === 0) put(doc, { is: 'text', text: part.empty })
      else putTable(doc, part.columns, part.rows, true)
      return
    case 'drawing':
      putDrawing(doc, part)
      return
  }
}

const BLOCK: readonly TableColumn[] = [
  { header: '', share: 0.24 },
  { header: '', share: 0.76 },
]
const widthOf = (doc: Doc) => doc.page.width - 2 * MARGIN
const bottomOf = (doc: Doc) => doc.page.height - MARGIN - 14

function keepTogether(doc: Doc, height: number): void {
  if (doc.y + height > bottomOf(doc)) doc.addPage()
}

function putTable(
  doc: Doc,
  columns: readonly TableColumn[],
  rows: readonly (readonly string[])[],
  headed = false,
): void {
  const head = () => {
    if (headed)
      putRow(
        doc,
        columns,
        columns.map(({ header }) => header),
        SOFT,
      )
  }
  head()
  for (const row of rows) {
    if (doc.y + rowHeight(doc, columns, row) > bottomOf(doc)) {
      doc.addPage()
      head()
    }
    putRow(doc, columns, row, INK)
  }
}

const PAD = 2.5

function rowHeight(doc: Doc, columns: readonly TableColumn[], row: readonly string[]): number {
  const heights = columns.map((column, index) => {
    face(doc, column)
    return doc.heightOfString(printable(row[index] ?? ''), { width: widthOf(doc) * column.share - 8 })
  })
  return Math.max(TEXT_PT, ...heights) + 2 * PAD
}

function putRow(doc: Doc, columns: readonly TableColumn[], row: readonly string[], colour: string): void {
  const height = rowHeight(doc, columns, row)
  const top = doc.y
  let x = MARGIN
  for (const [index, column] of columns.entries()) {
    const width = widthOf(doc) * column.share
    face(doc, column)
    // A cell that is higher than a page is cut at its end: notes have at most 4,000 characters, which is less.
    doc.fillColor(colour).text(printable(row[index] ?? ''), x, top + PAD, {
      width: width - 8,
      height: bottomOf(doc) - top,
    })
    x += width
  }
  doc.moveTo(MARGIN, top + height).lineTo(MARGIN + widthOf(doc), top + height)
  doc.lineWidth(0.5).strokeColor(RULE).stroke()
  doc.x = MARGIN
  doc.y = top + height
}

function face(doc: Doc, { figures }: TableColumn): void {
  doc.font(figures ? 'Courier' : 'Helvetica').fontSize(figures ? FIGURES_PT : TEXT_PT)
}

function putDrawing(doc: Doc, { layout, caption }: Extract<Part, { is: 'drawing' }>): void {
  const most = doc.page.height - 2 * MARGIN - 60
  const width = Math.min(widthOf(doc), (layout.width / layout.height) * most)
  keepTogether(doc, (layout.height * width) / layout.width + 30)
  const top = doc.y
  const height = drawStretch(doc, layout, { x: MARGIN, y: top, width })
  doc.x = MARGIN
  doc.y = top + height + 6
  put(doc, { is: 'note', text: caption })
}

function numberPages(doc: Doc, foot: string): void {
  const { count } = doc.bufferedPageRange()
  for (let page = 0; page < count; page++) {
    doc.switchToPage(page)
    // The foot stands in the margin, where pdfkit would begin another page.
    doc.page.margins.bottom = 0
    doc.font('Helvetica').fontSize(8).fillColor(SOFT)
    doc.text(foot, MARGIN, doc.page.height - 34, { lineBreak: false })
    doc.text(`page ${page + 1} of ${count}`, MARGIN, doc.page.height - 34, {
      width: widthOf(doc),
      align: 'right',
      lineBreak: false,
    })
  }
}
