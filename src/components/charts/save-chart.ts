/** Hands a text or an image to the browser's downloads. */
export function saveAsFile(content: string | Blob, name: string, type: string): void {
  const address = URL.createObjectURL(typeof content === 'string' ? new Blob([content], { type }) : content)
  const link = document.createElement('a')
  link.href = address
  link.download = name
  link.click()
  // The download has its own copy by then.
  setTimeout(() => URL.revokeObjectURL(address), 10_000)
}

/** Twice the size on screen: sharp on paper. */
const scale = 2

/** Draws an SVG on a canvas and saves it as PNG. */
export async function savePng(svg: string, name: string, background: string): Promise<void> {
  const image = new Image()
  image.src = `data:image/svg+xml;charset=utf-8,${encodeURIComponent(svg.includes('xmlns=') ? svg : svg.replace('<svg', '<svg xmlns="http://www.w3.org/2000/svg"'))}`
  await image.decode()
  const canvas = document.createElement('canvas')
  canvas.width = image.width * scale
  canvas.height = image.height * scale
  const pen = canvas.getContext('2d')
  if (pen === null) return
  pen.fillStyle = background
  pen.fillRect(0, 0, canvas.width, canvas.height)
  pen.drawImage(image, 0, 0, canvas.width, canvas.height)
  const blob = await new Promise<Blob | null>(resolve => canvas.toBlob(resolve, 'image/png'))
  if (blob !== null) saveAsFile(blob, name, 'image/png')
}
