/** What a figure is made of, in the units of its axes. Shaping functions make it, `FigurePlot` draws it. */
export type Tone = 'ink' | 'soft' | 'near' | 'far'

export interface Axis { label: string, unit: string, kind: 'linear' | 'log', domain: readonly [number, number] }

export interface ErrorPoint { x: number, y: number, xLow?: number, xHigh?: number, yLow?: number, yHigh?: number, /** Only an upper bound is known, at y: drawn as a bar, not as a point. */ bound?: true }

/** Closed forms are dotted, solutions without sampling solid, counted things points with bars; intervals are bands. */
export type Layer =
  | { kind: 'line', x: ArrayLike<number>, y: ArrayLike<number>, tone: Tone, dash?: 'dotted' | 'dashed', width?: number, opacity?: number }
  | { kind: 'band', x: ArrayLike<number>, low: ArrayLike<number>, high: ArrayLike<number>, tone: Tone }
  | { kind: 'bars', edges: ArrayLike<number>, heights: ArrayLike<number>, tone: Tone }
  | { kind: 'points', points: readonly ErrorPoint[], tone: Tone }

/** A line across the plot at a value of one axis, with its words at the line: in a row from the top, or at a value of the other axis. */
export interface Mark { axis: 'x' | 'y', at: number, tone: Tone, text: string, row?: number, level?: number, before?: boolean }

export interface Label { x: number, y: number, text: string, tone: Tone, anchor?: 'start' | 'middle' | 'end', dx?: number, dy?: number }

/** A place where the cursor stops, and what it reads there. */
export interface Reading { x: number, y: number, text: string }

/** Numbers behind the figure, each column with its unit in the heading. */
export interface FigureTable { columns: readonly string[], rows: readonly (readonly (number | null)[])[] }

export interface FigureModel {
  /** file name of downloads, without extension */
  name: string
  title: string
  /** what the figure shows, in words */
  summary: string
  x: Axis
  y: Axis
  layers: readonly Layer[]
  marks: readonly Mark[]
  labels: readonly Label[]
  readings: readonly Reading[]
  table: FigureTable
}

/** "switching time (ns)" */
export const axisTitle = ({ label, unit }: Pick<Axis, 'label' | 'unit'>): string => unit === '' ? label : `${label} (${unit})`
