import localFont from 'next/font/local'

// next/font reads these calls while compiling: every argument has to be a literal, so nothing is shared.
const text = localFont({
  src: '../fonts/atkinson-hyperlegible-next-latin-wght-normal.woff2',
  weight: '200 800',
  variable: '--font-text-latin',
  display: 'swap',
})
const textExt = localFont({
  src: '../fonts/atkinson-hyperlegible-next-latin-ext-wght-normal.woff2',
  weight: '200 800',
  variable: '--font-text-ext',
  display: 'swap',
  preload: false,
  adjustFontFallback: false,
  declarations: [
    {
      prop: 'unicode-range',
      value:
        'U+0100-02BA,U+02BD-02C5,U+02C7-02CC,U+02CE-02D7,U+02DD-02FF,U+1D00-1DBF,U+1E00-1E9F,U+1EF2-1EFF,U+2020,U+20A0-20AB,U+20AD-20C0,U+2113,U+2C60-2C7F,U+A720-A7FF',
    },
  ],
})
const mono = localFont({
  src: '../fonts/atkinson-hyperlegible-mono-latin-wght-normal.woff2',
  weight: '200 800',
  variable: '--font-mono-latin',
  display: 'swap',
  adjustFontFallback: false,
})
const monoExt = localFont({
  src: '../fonts/atkinson-hyperlegible-mono-latin-ext-wght-normal.woff2',
  weight: '200 800',
  variable: '--font-mono-ext',
  display: 'swap',
  preload: false,
  adjustFontFallback: false,
  declarations: [
    {
      prop: 'unicode-range',
      value:
        'U+0100-02BA,U+02BD-02C5,U+02C7-02CC,U+02CE-02D7,U+02DD-02FF,U+1D00-1DBF,U+1E00-1E9F,U+1EF2-1EFF,U+2020,U+20A0-20AB,U+20AD-20C0,U+2113,U+2C60-2C7F,U+A720-A7FF',
    },
  ],
})
const head = localFont({
  src: '../fonts/bricolage-grotesque-latin-opsz-normal.woff2',
  weight: '200 800',
  variable: '--font-head-latin',
  display: 'swap',
})
const headExt = localFont({
  src: '../fonts/bricolage-grotesque-latin-ext-opsz-normal.woff2',
  weight: '200 800',
  variable: '--font-head-ext',
  display: 'swap',
  preload: false,
  adjustFontFallback: false,
  declarations: [
    {
      prop: 'unicode-range',
      value:
        'U+0100-02BA,U+02BD-02C5,U+02C7-02CC,U+02CE-02D7,U+02DD-02FF,U+1D00-1DBF,U+1E00-1E9F,U+1EF2-1EFF,U+2020,U+20A0-20AB,U+20AD-20C0,U+2113,U+2C60-2C7F,U+A720-A7FF',
    },
  ],
})

export const fontVariables = [text, textExt, mono, monoExt, head, headExt].map((f) => f.variable).join(' ')
