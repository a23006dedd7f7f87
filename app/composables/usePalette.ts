/** Colours of the theme as hex strings, for what cannot take them from the style sheet. */
export interface Palette { paper: string, ink: string, soft: string, rule: string, hair: string, near: string, far: string }

/** The theme's colours as they are now, followed when the reader or the system changes them. Null until the page is mounted. */
export function usePalette() {
  const palette = shallowRef<Palette | null>(null)

  const read = () => {
    const style = getComputedStyle(document.documentElement)
    const token = (name: string) => style.getPropertyValue(`--${name}`).trim()
    palette.value = { paper: token('paper'), ink: token('ink'), soft: token('soft'), rule: token('rule'), hair: token('hair'), near: token('near'), far: token('far-fill') }
  }

  onMounted(read)
  const system = useMediaQuery('(prefers-color-scheme: dark)')
  watch(system, read)
  useMutationObserver(() => import.meta.client ? document.documentElement : null, read, { attributes: true, attributeFilter: ['data-theme'] })
  return palette
}

/** A colour between two, by share; both "#rrggbb". */
export function mixed(a: string, b: string, share: number): string {
  const parts = (hex: string) => [1, 3, 5].map(k => Number.parseInt(hex.slice(k, k + 2), 16))
  const [from, to] = [parts(a), parts(b)]
  return `#${from.map((v, k) => Math.round(v + (to[k]! - v) * share).toString(16).padStart(2, '0')).join('')}`
}
