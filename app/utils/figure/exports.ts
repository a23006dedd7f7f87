import fontUrl from '@fontsource/jetbrains-mono/files/jetbrains-mono-latin-400-normal.woff2?url'

const PROPERTIES = ['fill', 'fill-opacity', 'stroke', 'stroke-width', 'stroke-opacity', 'stroke-dasharray', 'stroke-linecap', 'stroke-linejoin', 'opacity', 'font-family', 'font-size', 'text-anchor'] as const
/** Paper left round an exported drawing, px. */
const MARGIN = 16
const NAMESPACE = 'http://www.w3.org/2000/svg'

/** The drawing as a file of its own: resolved colours as attributes, the ground, and the typeface within. */
export async function standaloneSvg(svg: SVGSVGElement): Promise<string> {
  const copy = svg.cloneNode(true)
  if (!(copy instanceof SVGSVGElement)) throw new TypeError('not a drawing')
  const originals = svg.querySelectorAll<SVGElement>('*')
  copy.querySelectorAll<SVGElement>('*').forEach((element, k) => {
    const style = getComputedStyle(originals[k]!)
    for (const property of PROPERTIES) element.setAttribute(property, style.getPropertyValue(property))
    element.removeAttribute('class')
  })
  copy.querySelectorAll('[data-cursor]').forEach(element => element.remove())
  copy.removeAttribute('class')
  copy.removeAttribute('aria-hidden')
  copy.setAttribute('xmlns', NAMESPACE)
  const { width, height } = exportedSize(svg)
  copy.setAttribute('width', String(width))
  copy.setAttribute('height', String(height))
  copy.setAttribute('viewBox', `${-MARGIN} ${-MARGIN} ${width} ${height}`)

  const ground = document.createElementNS(NAMESPACE, 'rect')
  ground.setAttribute('x', String(-MARGIN))
  ground.setAttribute('y', String(-MARGIN))
  ground.setAttribute('width', '100%')
  ground.setAttribute('height', '100%')
  ground.setAttribute('fill', getComputedStyle(document.documentElement).getPropertyValue('--paper').trim())
  const face = document.createElementNS(NAMESPACE, 'style')
  face.textContent = `@font-face{font-family:"JetBrains Mono";src:url(${await asDataUrl(fontUrl)}) format("woff2")}`
  copy.prepend(face, ground)
  return new XMLSerializer().serializeToString(copy)
}

/** The drawing as a picture of `scale` pixels to the point. */
export async function asPng(svg: SVGSVGElement, scale = 2): Promise<Blob> {
  const image = new Image()
  image.src = `data:image/svg+xml;charset=utf-8,${encodeURIComponent(await standaloneSvg(svg))}`
  await image.decode()
  const canvas = document.createElement('canvas')
  const { width, height } = exportedSize(svg)
  canvas.width = width * scale
  canvas.height = height * scale
  canvas.getContext('2d')?.drawImage(image, 0, 0, canvas.width, canvas.height)
  return new Promise((resolve, reject) => canvas.toBlob(blob => blob ? resolve(blob) : reject(new Error('no picture')), 'image/png'))
}

const exportedSize = (svg: SVGSVGElement) => ({ width: svg.width.baseVal.value + 2 * MARGIN, height: svg.height.baseVal.value + 2 * MARGIN })

async function asDataUrl(url: string): Promise<string> {
  const bytes = new Uint8Array(await (await fetch(url)).arrayBuffer())
  let text = ''
  for (const byte of bytes) text += String.fromCharCode(byte)
  return `data:font/woff2;base64,${btoa(text)}`
}

/** Hands a file to the reader. */
export function saveFile(name: string, content: Blob | string, type = 'text/plain') {
  const url = URL.createObjectURL(typeof content === 'string' ? new Blob([content], { type: `${type};charset=utf-8` }) : content)
  const link = document.createElement('a')
  link.href = url
  link.download = name
  link.click()
  URL.revokeObjectURL(url)
}
