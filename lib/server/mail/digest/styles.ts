import type { CSSProperties } from 'react'

/** Light tokens of the design; mail gets them inlined. */
const ink = '#10262C'
const ink2 = '#3D5157'
const ink3 = '#55656B'
const leaf = '#FCFAF6'
const bed = '#EEE9DE'
const rule = '#D9D3C5'
const silt = '#9B3B26'
const deep = '#0A3F4A'

const family = '"Atkinson Hyperlegible Next", "Atkinson Hyperlegible", Verdana, "Segoe UI", sans-serif'

export const styles = {
  body: { margin: 0, padding: '24px 0', backgroundColor: bed, fontFamily: family, color: ink },
  container: { width: '100%', maxWidth: 600, backgroundColor: leaf, padding: '26px 40px 30px' },
  brand: { margin: 0, fontSize: 16, lineHeight: '22px', fontWeight: 680 },
  week: { margin: 0, fontSize: 14, lineHeight: '22px', color: ink3, textAlign: 'right' },
  title: {
    margin: '22px 0 14px',
    fontSize: 28,
    lineHeight: '34px',
    fontWeight: 650,
    letterSpacing: '-0.01em',
  },
  text: { margin: '0 0 12px', fontSize: 17, lineHeight: '26px' },
  quiet: { margin: '2px 0 0', fontSize: 16, lineHeight: '24px', color: ink2 },
  needs: { borderTop: `3px solid ${ink}`, marginTop: 14, paddingTop: 14, paddingBottom: 14 },
  glassCell: { width: 64, verticalAlign: 'top' },
  name: { margin: 0, fontSize: 18, lineHeight: '24px', fontWeight: 650 },
  heading: { margin: '20px 0 4px', fontSize: 17, lineHeight: '24px', fontWeight: 650 },
  table: {
    width: '100%',
    borderCollapse: 'collapse',
    fontSize: 16,
    lineHeight: '22px',
    borderTop: `1px solid ${ink}`,
  },
  cell: {
    padding: '8px 8px 8px 0',
    borderBottom: `1px solid ${rule}`,
    textAlign: 'left',
    verticalAlign: 'top',
  },
  rowHead: {
    padding: '8px 8px 8px 0',
    borderBottom: `1px solid ${rule}`,
    textAlign: 'left',
    verticalAlign: 'top',
    fontWeight: 400,
  },
  reason: { fontSize: 14, lineHeight: '20px', color: ink3 },
  figure: {
    padding: '8px 0',
    borderBottom: `1px solid ${rule}`,
    textAlign: 'right',
    whiteSpace: 'nowrap',
    verticalAlign: 'top',
  },
  standing: {
    padding: '8px 0 8px 28px',
    borderBottom: `1px solid ${rule}`,
    textAlign: 'left',
    width: 170,
    color: ink2,
    verticalAlign: 'top',
  },
  short: { color: silt, fontWeight: 600 },
  unit: { color: ink3 },
  columnHead: { padding: '6px 0', textAlign: 'left', fontSize: 14, fontWeight: 400, color: ink3 },
  caution: { margin: '10px 0 0', fontSize: 14, lineHeight: '21px', color: ink2 },
  button: {
    display: 'inline-block',
    marginTop: 22,
    padding: '13px 20px',
    borderRadius: 4,
    backgroundColor: deep,
    color: leaf,
    fontSize: 16,
    lineHeight: '20px',
    fontWeight: 600,
    textDecoration: 'none',
  },
  line: { margin: '26px 0 14px', border: 'none', borderTop: `1px solid ${rule}` },
  foot: { margin: '0 0 4px', fontSize: 14, lineHeight: '21px', color: ink3 },
} satisfies Record<string, CSSProperties>
