/** The cookie that keeps a chosen theme; no cookie means as the reader's system asks. */
export const THEME_COOKIE = 'ebb-theme'
export const THEMES = ['light', 'dark'] as const
export type Theme = (typeof THEMES)[number]

/** The theme a cookie's value names, or null for anything else. */
export function themeOf(value: string | undefined): Theme | null {
  return THEMES.find((theme) => theme === value) ?? null
}
