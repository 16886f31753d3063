/** Hands text to the reader as a file. */
export function saveText(fileName: string, type: string, text: string): void {
  saveBlob(fileName, new Blob([text], { type }))
}

export function saveBlob(fileName: string, blob: Blob): void {
  const url = URL.createObjectURL(blob)
  const link = document.createElement('a')
  link.href = url
  link.download = fileName
  link.click()
  URL.revokeObjectURL(url)
}
