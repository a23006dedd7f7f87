import type { Config } from 'tailwindcss'
import plugin from 'tailwindcss/plugin'

/** Every colour is a variable of app/assets/css/tailwind.css, where both themes are written once. */
const token = (name: string) => `var(--${name})`

export default {
  content: [],
  theme: {
    colors: {
      'transparent': 'transparent',
      'current': 'currentColor',
      'paper': token('paper'),
      'well': token('well'),
      'ink': token('ink'),
      'soft': token('soft'),
      'rule': token('rule'),
      'hair': token('hair'),
      'near': token('near'),
      'far': token('far'),
      'far-fill': token('far-fill'),
      'brick': token('brick'),
    },
    fontFamily: { mono: ['"JetBrains Mono"', 'ui-monospace', 'SFMono-Regular', 'Menlo', 'Consolas', 'monospace'] },
    fontSize: {
      fine: ['0.719rem', '1.5'],
      note: ['0.781rem', '1.55'],
      body: ['0.875rem', '1.55'],
      lead: ['1.0625rem', '1.5'],
      answer: ['1.4375rem', '1.4'],
      sentence: ['1.5625rem', '1.62'],
      big: ['1.9375rem', '1.2'],
    },
    fontWeight: { normal: '400', semibold: '600' },
    borderRadius: { none: '0' },
    boxShadow: {},
    screens: { md: '768px', wide: '1100px', huge: '2000px' },
    extend: {
      spacing: { gutter: 'var(--gutter)' },
      maxWidth: { prose: '38em', sentence: '77.5rem' },
    },
  },
  plugins: [
    plugin(({ addVariant }) => addVariant('night', ['@media (prefers-color-scheme: dark) { :root:not([data-theme]) & }', ':root[data-theme=night] &'])),
  ],
} satisfies Config
