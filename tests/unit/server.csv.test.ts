import { describe, expect, it } from 'vitest'
import { csvBlocks, csvCell, csvRecord } from '../../server/utils/csv'

describe('CSV', () => {
  it.each(['=1+1', '+cmd', '-2+3', '@SUM(A1)', '\t=1', '\r=1'])('keeps a spreadsheet from running %j', (text) => {
    expect(csvCell(text).replace(/^"/, '')).toMatch(/^'/)
  })

  it('keeps numbers numbers, also negative ones', () => {
    expect([-2.5, 0, 1e-9, 1e21].map(csvCell)).toEqual(['-2.5', '0', '1e-9', '1e+21'])
    expect([Number.NaN, Number.POSITIVE_INFINITY, null].map(csvCell)).toEqual(['', '', ''])
  })

  it('quotes after RFC 4180', () => {
    expect(csvRecord(['plain', 'a,b', 'say "so"', 'two\nlines', 1])).toBe('plain,"a,b","say ""so""","two\nlines",1\r\n')
  })

  it('streams long tables in blocks that join to the whole', async () => {
    const rows = Array.from({ length: 20_000 }, (_, k) => [k, k / 7])
    const blocks: string[] = []
    for await (const block of csvBlocks(['Trial', 'Time (ns)'], rows)) blocks.push(block)
    expect(blocks.length).toBeGreaterThan(3)
    expect(Math.max(...blocks.map(block => block.length))).toBeLessThan(70_000)
    const lines = blocks.join('').trimEnd().split('\r\n')
    expect(lines).toHaveLength(20_001)
    expect(lines[0]).toBe('Trial,Time (ns)')
    expect(lines[20_000]).toBe(`19999,${19_999 / 7}`)
  })
})
