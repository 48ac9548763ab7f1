import '@fontsource-variable/atkinson-hyperlegible-mono/wght.css'
import '@fontsource-variable/atkinson-hyperlegible-next/wght.css'
import './globals.css'
import type { Metadata, Viewport } from 'next'
import { cookies } from 'next/headers'
import { GlassPatterns } from '@/components/ui/GlassPatterns'
import { THEME_COOKIE, themeOf } from '@/lib/format/theme'

export const metadata: Metadata = {
  title: { default: 'Ebbmark', template: '%s · Ebbmark' },
  description: 'How much outdoor air every room gets, from the CO2 that people leave behind.',
  applicationName: 'Ebbmark',
  manifest: '/manifest.webmanifest',
  icons: { icon: '/icon.svg' },
  robots: { index: false, follow: false },
}

export const viewport: Viewport = {
  width: 'device-width',
  initialScale: 1,
  themeColor: [
    { media: '(prefers-color-scheme: light)', color: '#F7F4ED' },
    { media: '(prefers-color-scheme: dark)', color: '#0C1D22' },
  ],
}

/** The theme comes from a cookie, so the first paint is already the chosen one; without it the reader's system decides. */
export default async function RootLayout({ children }: { children: React.ReactNode }) {
  const theme = themeOf((await cookies()).get(THEME_COOKIE)?.value)
  return (
    <html lang="en" data-theme={theme ?? undefined}>
      <body>
        <GlassPatterns />
        {children}
      </body>
    </html>
  )
}
