import { z } from 'zod'
import { trialRecords } from '#shared/physics/engine'
import type { Answer, PathsLayout } from '#shared/schemas/answer'
import { answerSchema } from '#shared/schemas/answer'
import { jobSummarySchema } from '#shared/schemas/api'
import { jobSpecSchema } from '#shared/schemas/job'
import { unpackArrays } from '#shared/utils/arrays'
import { toUnit } from '#shared/utils/quantity'
import { summaryRows } from './exportSummary'
import type { Subject } from './exportSummary'
import { HttpProblem } from './problems'

export const TABLE_NAMES = ['summary', 'survival', 'histogram', 'ensemble', 'times', 'path', 'mean', 'paths', 'errors', 'checks'] as const
export type TableName = typeof TABLE_NAMES[number]

export const exportQuerySchema = z.strictObject({ table: z.enum(TABLE_NAMES).meta({ description: 'Which table of the answer.' }) })

/** Describes a table's columns: the CSV's header, the unit as the trade writes it and in UCUM, and what the column holds. */
export const columnsSchema = z.strictObject({
  table: z.enum(TABLE_NAMES),
  columns: z.array(z.strictObject({ header: z.string(), unit: z.string(), ucum: z.string(), description: z.string() })),
})
type Column = z.infer<typeof columnsSchema>['columns'][number]

export const jobExportSchema = z.strictObject({
  format: z.literal('farpole-job'),
  formatVersion: z.literal(1),
  job: jobSummarySchema.omit({ waiting: true, eta: true }),
  spec: jobSpecSchema,
  specHash: z.string(),
  seed: z.int(),
  engineVersion: z.string(),
  answer: answerSchema,
})

type Cell = number | string | null
type Row = readonly Cell[]

export interface ExportSource extends Subject {
  answer: Answer
  /** Packed paths of the answer. */
  paths: Uint8Array
  /** Payloads of the chunks that are done, in order of their trials. */
  payloads: () => AsyncIterable<Uint8Array>
}

interface Table {
  columns: readonly Column[]
  rows: (source: ExportSource) => Iterable<Row> | AsyncIterable<Row>
}

const time = (header: string, description: string): Column => ({ header: `${header} (ns)`, unit: 'ns', ucum: 'ns', description })
const pure = (header: string, description: string): Column => ({ header, unit: '', ucum: '1', description })
const ohms = (header: string, description: string): Column => ({ header: `${header} (Ω)`, unit: 'Ω', ucum: 'Ohm', description })
const component = (axis: string) => pure(`m_${axis}`, `Component of the unit moment along ${axis}; +z is the parallel state.`)
const ns = (t: number): number | null => Number.isNaN(t) ? null : toUnit(t, 'time', 'ns')
const yes = (flag: boolean) => flag ? 1 : 0

/** The table of that name. @throws HttpProblem not-found where this kind of answer has none */
export function requireTable(name: TableName, kind: Answer['kind']): Table {
  const table = TABLES[name]
  if (!table.kinds.includes(kind)) throw new HttpProblem('not-found', { detail: 'This kind of answer has no such table.' })
  return table
}

const EVERY: readonly Answer['kind'][] = ['switching', 'motion', 'failure']
const PATHS: readonly Answer['kind'][] = ['switching', 'motion']

const TABLES: Record<TableName, Table & { kinds: readonly Answer['kind'][] }> = {
  summary: {
    kinds: EVERY,
    columns: [
      { header: 'Quantity', unit: '', ucum: '', description: 'What the row is about.' },
      { header: 'Value', unit: '', ucum: '', description: 'In the unit of its row.' },
      { header: '95 % from', unit: '', ucum: '', description: 'Lower end of the 95 % interval; empty where there is none.' },
      { header: '95 % to', unit: '', ucum: '', description: 'Upper end of the same.' },
      { header: 'Unit', unit: '', ucum: '', description: 'Unit of the row; empty for pure numbers and text.' },
    ],
    rows: source => summaryRows(source, source.answer),
  },
  survival: {
    kinds: ['switching'],
    columns: [
      time('Time', 'From the leading half amplitude of the pulse.'),
      pure('Share not crossed yet', 'Share of all trials that has not crossed m·e = 0.'),
      pure('95 % from', 'Lower end of the pointwise 95 % Wilson interval.'), pure('95 % to', 'Upper end of the same.'),
    ],
    rows: function* ({ answer }) {
      if (answer.kind !== 'switching') return
      const { time: times, value, low, high } = answer.survival
      for (const [k, t] of times.entries()) yield [ns(t), value[k]!, low[k]!, high[k]!]
    },
  },
  histogram: {
    kinds: ['switching'],
    columns: [
      time('From', 'Lower edge of the bin of switching times.'), time('To', 'Upper edge of the bin.'),
      pure('Trials', 'Trials whose first crossing falls into the bin.'),
    ],
    rows: function* ({ answer }) {
      if (answer.kind !== 'switching') return
      const { edges, counts } = answer.histogram
      for (const [k, count] of counts.entries()) yield [ns(edges[k]!), ns(edges[k + 1]!), count]
    },
  },
  ensemble: {
    kinds: ['switching'],
    columns: [
      time('Time', 'From the leading half amplitude of the pulse.'),
      pure('m·e 5 %', 'Value that 5 % of the trials are below, along the easy axis; +1 is parallel.'), pure('m·e median', 'Median of the same.'),
      pure('m·e 95 %', 'Value that 95 % of the trials are below.'), pure('m·e mean', 'Mean of the trials.'),
      ohms('R 5 %', 'Resistance that 5 % of the trials are below, at the drive of the moment.'), ohms('R median', 'Median of the same.'),
      ohms('R 95 %', 'Resistance that 95 % of the trials are below.'), ohms('R mean', 'Mean of the trials.'),
    ],
    rows: function* ({ answer }) {
      if (answer.kind !== 'switching' || !answer.ensemble) return
      const { time: times, moment, resistance } = answer.ensemble
      for (const [k, t] of times.entries()) {
        yield [ns(t), moment.low[k]!, moment.median[k]!, moment.high[k]!, moment.mean[k]!, resistance.low[k]!, resistance.median[k]!, resistance.high[k]!, resistance.mean[k]!]
      }
    },
  },
  times: {
    kinds: ['switching'],
    columns: [
      pure('Trial', 'Number of the trial; its random stream follows from it, the seed and the specification.'),
      time('Switching time', 'First crossing of m·e = 0 during the pulse; empty where there was none.'),
      pure('On the starting side at pulse end', '1 where m·e is still on the starting side when the pulse has ended.'),
      pure('Failed after settling', '1 where m reached the starting well before the other, or neither.'),
      pure('Undecided', '1 where it was in neither well when watching ended.'),
    ],
    rows: async function* ({ payloads }) {
      for await (const payload of payloads()) {
        for (const { trial, crossing, endsNear, settlesNear, undecided } of trialRecords(payload)) {
          yield [trial, ns(crossing), yes(endsNear), yes(settlesNear || undecided), yes(undecided)]
        }
      }
    },
  },
  path: {
    kinds: PATHS,
    columns: [time('Time', 'From the leading half amplitude of the pulse.'), component('x'), component('y'), component('z')],
    rows: ({ answer }) => answer.kind === 'failure' ? [] : triples(answer.deterministic.time, answer.deterministic.m),
  },
  mean: {
    kinds: ['motion'],
    columns: [time('Time', 'From the leading half amplitude of the pulse.'), component('x'), component('y'), component('z')],
    rows: ({ answer }) => answer.kind === 'motion' ? triples(answer.mean.time, answer.mean.m) : [],
  },
  paths: {
    kinds: PATHS,
    columns: [
      pure('Path', 'Number of the path with noise.'), time('Time', 'From the leading half amplitude of the pulse.'),
      component('x'), component('y'), component('z'),
    ],
    rows: ({ answer, paths }) => answer.kind === 'failure' ? [] : pathRows(answer.paths, paths),
  },
  errors: {
    kinds: ['failure'],
    columns: [
      time('Pulse width', 'Half amplitude to half amplitude.'),
      pure('Write error', 'By the rule that is asked, from the axial Fokker–Planck equation; 0 below 1e-15. No row where there is no solution.'),
      pure('Closed form', 'The linearised closed form; empty where it does not hold.'),
    ],
    rows: function* ({ answer }) {
      if (answer.kind !== 'failure' || answer.solution.kind !== 'solved') return
      const { width, value, closedForm } = answer.solution
      for (const [k, t] of width.entries()) yield [ns(t), value[k]!, closedForm?.[k] ?? null]
    },
  },
  checks: {
    kinds: ['failure'],
    columns: [
      time('Pulse width', 'Half amplitude to half amplitude.'), pure('Trials', 'Independent writes at this width.'),
      pure('Failed after settling', 'Trials that reached the starting well before the other, or neither.'), pure('On the starting side at pulse end', 'Trials with m·e on the starting side when the pulse has ended.'),
      pure('Never crossed', 'Trials in which m·e never crossed 0 during the pulse.'), pure('Solved', 'Write error without sampling, by the rule that is asked; empty where it is not solved.'),
      pure('Standard errors apart', 'How far the count lies from it.'),
    ],
    rows: function* ({ answer }) {
      if (answer.kind !== 'failure') return
      for (const { width, trials, failures, solved } of answer.checks) {
        yield [ns(width), trials, failures.afterSettling.count, failures.atPulseEnd.count, failures.neverCrossed.count, solved?.value ?? null, solved?.apart ?? null]
      }
    },
  },
}

function* triples(times: readonly number[], m: readonly number[]): Generator<Row> {
  for (const [k, t] of times.entries()) yield [ns(t), m[3 * k]!, m[3 * k + 1]!, m[3 * k + 2]!]
}

function* pathRows(layout: PathsLayout, packed: Uint8Array): Generator<Row> {
  const m = unpackArrays(packed).arrays.paths
  if (!m) return
  for (let path = 0; path < layout.paths; path++) {
    for (let k = 0; k < layout.samples; k++) {
      const at = 3 * (path * layout.samples + k)
      yield [path, ns(layout.start + k * layout.interval), single(m[at]!), single(m[at + 1]!), single(m[at + 2]!)]
    }
  }
}

/** Shortest decimal that reads back as the same single-precision number, near enough. */
const single = (x: number) => Number(x.toPrecision(7))
