import type { Answer, Estimate, Proportion } from '#shared/schemas/answer'
import type { JobSpec } from '#shared/schemas/job'
import type { JobPreset } from '#shared/schemas/presets'
import { deriveNumbers } from '#shared/physics/derived'
import { toUnit } from '#shared/utils/quantity'

/** What an export is about. */
export interface Subject { sentence: string, spec: JobSpec, cpuSeconds: number, preset: JobPreset | null }

type Row = readonly (number | string | null)[]

const ns = (t: number) => toUnit(t, 'time', 'ns')
const share = (name: string, p: Proportion): Row => [name, p.value, p.low, p.high, '']
const inTime = (name: string, e: Estimate | null): Row => [name, e && ns(e.value), e && ns(e.low), e && ns(e.high), 'ns']

/** Quantity, value, interval and unit of everything that an answer states, with its derived numbers and its provenance. */
export function* summaryRows({ sentence, spec, cpuSeconds, preset }: Subject, answer: Answer): Generator<Row> {
  yield ['Question', sentence, null, null, '']
  yield ['Answer', answer.words.headline, null, null, '']
  yield ['All trials done', answer.complete ? 'yes' : 'no', null, null, '']
  if (answer.kind === 'switching') yield* switchingRows(answer)
  else if (answer.kind === 'motion') yield* motionRows(answer)
  else yield* failureRows(answer)
  for (const number of deriveNumbers(spec).numbers) yield [`${number.label} (${number.symbol}), SI`, number.value, null, null, number.text]
  if (preset) yield ['Preset', `${preset.name}, version ${preset.version}${preset.changed ? ', changed' : ''}`, null, null, '']
  const { run } = answer
  yield ['Engine', run.engineVersion, null, null, '']
  yield ['Scheme', run.scheme, null, null, '']
  yield ['Longest step', toUnit(run.step, 'time', 'ps'), null, null, 'ps']
  yield ['Seed', run.seed, null, null, '']
  yield ['Specification, SHA-256', run.specHash, null, null, '']
  yield ['Trial-steps', run.trialSteps, null, null, '']
  yield ['CPU time', cpuSeconds, null, null, 's']
}

function* switchingRows(answer: Extract<Answer, { kind: 'switching' }>): Generator<Row> {
  yield ['Trials', answer.trials, null, null, '']
  yield share('Failed after settling', answer.failures.afterSettling)
  yield share('On the starting side at pulse end', answer.failures.atPulseEnd)
  yield share('Never crossed during the pulse', answer.failures.neverCrossed)
  yield ['Undecided', answer.undecided, null, null, '']
  yield inTime('Mean switching time', answer.time.mean)
  yield inTime('Spread of switching times', answer.time.spread)
  if (answer.energy) yield ['Energy drawn in a write', answer.energy.value, answer.energy.low, answer.energy.high, 'J']
  for (const { share: part, value, low, high } of answer.time.percentiles) {
    yield [`Crossed by, share ${part}`, value === null ? null : ns(value), low === null ? null : ns(low), high === null ? null : ns(high), 'ns']
  }
}

function* failureRows({ target, needed, checks }: Extract<Answer, { kind: 'failure' }>): Generator<Row> {
  yield ['Target error', target, null, null, '']
  yield ['Pulse width for it', needed && ns(needed.width), null, null, 'ns']
  if (needed?.standardError != null) yield ['Its standard error', ns(needed.standardError), null, null, 'ns']
  for (const { width, failures } of checks) yield share(`Failed after settling at ${Number(ns(width).toPrecision(6))} ns`, failures.afterSettling)
}

function* motionRows(answer: Extract<Answer, { kind: 'motion' }>): Generator<Row> {
  if (answer.ended) yield share('Paths that end on the far side', answer.ended)
  yield ['Paths that crossed', answer.crossed, null, null, '']
  for (const [k, crossing] of answer.crossings.entries()) yield [`First crossing of path ${k}`, crossing === null ? null : ns(crossing), null, null, 'ns']
}
