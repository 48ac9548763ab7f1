import type { Config } from 'tailwindcss'

const token = (name: string) => `var(--${name})`
const tokens = (...names: string[]) => Object.fromEntries(names.map((name) => [name, token(name)]))

/** The estuary palette, type steps and forms as utilities; the values live in app/globals.css, once for each theme. */
export default {
  content: ['./app/**/*.{ts,tsx}', './components/**/*.{ts,tsx}'],
  theme: {
    colors: {
      transparent: 'transparent',
      current: 'currentColor',
      ...tokens('paper', 'leaf', 'bed', 'rule', 'edge', 'ink', 'ink-2', 'ink-3'),
      ...tokens('tide', 'tide-ink', 'reed', 'reed-ink', 'shoal', 'shoal-ink', 'silt', 'silt-ink'),
      ...tokens('fog', 'fog-ink', 'deep', 'on-deep', 'wash-tide', 'wash-silt', 'wash-shoal', 'focus'),
    },
    fontFamily: { text: [token('text')], figures: [token('figures')] },
    fontSize: {
      '1': ['12px', '16px'],
      '2': ['13.5px', '19px'],
      '3': ['15.5px', '23px'],
      '4': ['18px', '24px'],
      '5': ['22px', '30px'],
      '6': ['29px', '33px'],
      '7': ['38px', '44px'],
      '8': ['56px', '56px'],
    },
    borderRadius: { none: '0', '1': '2px', '2': '4px' },
    screens: { sm: '641px', md: '901px', lg: '1181px', wall: '1921px' },
    boxShadow: {},
    extend: {
      maxWidth: { page: '1440px', measure: '43em' },
      height: { control: '40px', touch: '52px' },
      transitionDuration: { quick: token('quick'), settle: token('settle') },
      transitionTimingFunction: { ease: token('ease') },
    },
  },
} satisfies Config
