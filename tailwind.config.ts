import type { Config } from 'tailwindcss'

/** Names for the tokens of app/globals.css, where the values stand once for day and once for night. */
export default {
  content: ['./app/**/*.{ts,tsx}', './components/**/*.{ts,tsx}'],
  theme: {
    colors: {
      transparent: 'transparent',
      current: 'currentColor',
      paper: 'var(--paper)',
      sheet: 'var(--sheet)',
      ink: 'var(--ink)',
      soft: 'var(--ink-soft)',
      hairline: 'var(--hairline)',
      edge: 'var(--edge)',
      'side-a': 'var(--side-a)',
      'side-b': 'var(--side-b)',
      vermilion: 'var(--vermilion)',
    },
    fontFamily: {
      text: 'var(--font-text)',
      figures: 'var(--font-figures)',
      head: 'var(--font-head)',
    },
    extend: {},
  },
} satisfies Config
