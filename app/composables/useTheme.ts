export type Theme = 'paper' | 'night'

const asTheme = (value: unknown): Theme | null => value === 'paper' || value === 'night' ? value : null

/** The reader's own choice of theme, kept in a cookie so that the server renders it; null follows the system. */
export function useTheme() {
  const cookie = useCookie('theme', { maxAge: 365 * 86_400, sameSite: 'lax', path: '/' })
  const chosen = useState<Theme | null>('theme', () => asTheme(cookie.value))

  const choose = (theme: Theme) => {
    chosen.value = theme
    cookie.value = theme
  }
  /** In the browser alone: what is shown now. */
  const shown = (): Theme => chosen.value ?? (window.matchMedia('(prefers-color-scheme: dark)').matches ? 'night' : 'paper')

  return { chosen: readonly(chosen), choose, shown }
}
