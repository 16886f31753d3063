/** What XML 1.0 has no place for, escaped or not (production 2, Char): most controls, lone surrogates, U+FFFE and U+FFFF. */
const NOT_XML = /[^\t\n\r\u{20}-\u{D7FF}\u{E000}-\u{FFFD}\u{10000}-\u{10FFFF}]/gu

const ENTITIES: Record<string, string> = {
  '&': '&amp;',
  '<': '&lt;',
  '>': '&gt;',
  '"': '&quot;',
  "'": '&apos;',
  // Attributes would have them made spaces.
  '\t': '&#9;',
  '\n': '&#10;',
  '\r': '&#13;',
}

/** Text for an element or a quoted attribute. What XML cannot hold becomes U+FFFD. */
export function escapeXml(text: string): string {
  return text.replace(NOT_XML, '\uFFFD').replace(/[&<>"'\t\n\r]/g, (found) => ENTITIES[found] ?? found)
}
