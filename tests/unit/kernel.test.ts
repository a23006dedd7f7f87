import { describe, expect, it } from 'vitest'
import { openKernel } from '#shared/kernels/loader'
import type { Kernel, KernelKind } from '#shared/kernels/loader'
import { normalQuantile } from '#shared/numerics/normal'
import { responseOf, Rk4Stepper, STAGE, STAGE_LENGTH } from '#shared/numerics/macrospin'
import type { Dynamics } from '#shared/numerics/macrospin'
import { TrialRunner } from '#shared/numerics/trial'
import type { TrialOutcome, TrialPlan } from '#shared/numerics/trial'
import { wellSampler } from '#shared/numerics/boltzmann'
import { philox, STREAM, UniformStream } from '#shared/numerics/philox'

const DYNAMICS: Dynamics = {
  damping: 0.05, diagonal: [0.1, 0.02, 1], field: [0.03, 0.01, -0.1], reference: [0.6, 0, 0.8],
  torque: { q0: -0.25, q1: 1, q2: 0.36 }, fieldLikeRatio: 0.2, noise: 0.05 / 40,
}
/** A junction in series with a resistance and under a limit, with anisotropy, field-like torque and noise that follow the drive. */
const ANSWERING: Dynamics = {
  ...DYNAMICS, diagonal: [0, -3, 1],
  response: (w, row) => {
    row[STAGE.a] = -0.4 * w
    row[STAGE.c] = 0.05 * w * w
    row[STAGE.x] = 0
    row[STAGE.y] = -3 + 0.4 * w
    row[STAGE.z] = 1 - 0.2 * w
    row[STAGE.noise] = DYNAMICS.noise * (1 + w * w)
    row[STAGE.q1] = 1.2
    row[STAGE.q2] = 0.3
    row[STAGE.r1] = 1.25 * Math.abs(w)
    row[STAGE.r2] = 0.5 * Math.abs(w)
  },
}
const plan = (changes: Partial<TrialPlan> = {}): TrialPlan => ({
  dynamics: DYNAMICS, key: [123, 456], side: 1,
  start: wellSampler({ stability: 40, diagonal: [0, 0, 1], field: [0, 0, 0] }, [0, 0, 1]),
  watched: [{ start: -2, end: 2, from: 0, to: 1, steps: 16 }, { start: 2, end: 60, from: 1, to: 1, steps: 232 }, { start: 60, end: 64, from: 1, to: 0, steps: 16 }],
  settling: { step: 0.25, nearLevel: 0.9, farLevel: 0.9, longest: 4000 },
  ...changes,
})

const KINDS: KernelKind[] = ['simd', 'scalar']

function runAll(kernel: Kernel, trialPlan: TrialPlan, first: number, count: number): TrialOutcome[] {
  const runner = new TrialRunner(trialPlan, kernel)
  const all: TrialOutcome[] = []
  while (all.length < count) {
    const group = Array.from({ length: Math.min(runner.lanes, count - all.length) }, (): TrialOutcome => ({ crossing: 0, endsNear: false, settlesNear: false, undecided: false, steps: 0 }))
    runner.run(first + all.length, group)
    all.push(...group)
  }
  return all
}

describe('every build of the kernel', () => {
  it.each([1, 3, 4, 5, 8, 9])('gives the same bytes, %d trials, wherever a trial lies among the lanes', (count) => {
    const before = { span: 4, steps: 16 }
    expect(runAll(openKernel('simd'), plan({ dynamics: ANSWERING, before }), 0, count)).toEqual(runAll(openKernel('scalar'), plan({ dynamics: ANSWERING, before }), 0, count))
    const simd = runAll(openKernel('simd'), plan(), 0, count)
    const scalar = runAll(openKernel('scalar'), plan(), 0, count)
    expect(simd).toEqual(scalar)
    const shifted = runAll(openKernel('simd'), plan(), 1, count)
    expect(shifted.slice(0, count - 1)).toEqual(simd.slice(1))
  })

  it.each(KINDS.flatMap(kind => [[kind, 'a torque', DYNAMICS], [kind, 'a device that answers otherwise', ANSWERING]] as const))('%s follows the plain double-precision stepper on the same noise: %s', (kind, _name, dynamics) => {
    const kernel = openKernel(kind)
    const trialPlan = plan({ settling: null, dynamics })
    const [outcome] = runAll(kernel, trialPlan, 7, 1)
    const m = new Float64Array(3)
    const starts = new UniformStream(trialPlan.key, STREAM.start)
    starts.restart(7)
    trialPlan.start(starts, m)
    const plain = new PlainXoshiro(dynamics, trialPlan.key, 7)
    plain.m.set(m)
    let crossing = NaN
    for (const s of trialPlan.watched) {
      const h = (s.end - s.start) / s.steps
      for (let k = 0; k < s.steps; k++) {
        const before = plain.m[2]!
        const w = (part: number) => s.from + (s.to - s.from) * (k + part) / s.steps
        plain.draw(h, w(0.5))
        plain.step(h, w(0), w(0.5), w(1))
        if (Number.isNaN(crossing) && plain.m[2]! <= 0) crossing = s.start + h * (k + before / (before - plain.m[2]!))
      }
    }
    // A crossing found by the bridge may come earlier by a few steps.
    expect(outcome!.crossing).toBeLessThanOrEqual(crossing + 1e-3)
    expect(outcome!.crossing).toBeGreaterThan(crossing - 2)
    const f32 = new Float32Array(kernel.memory.buffer)
    for (let axis = 0; axis < 3; axis++) expect(Math.abs(f32[4 * axis]! - plain.m[axis]!)).toBeLessThan(2e-4)
  })

  it.each(KINDS)('%s turns words into normal numbers to single precision, to 6.2σ on both sides', (kind) => {
    const { normalOf } = openKernel(kind)
    for (const distance of [0, 1, 2, 5, 30, 1000, 1e5, 1e7, 1e8, 1.6e8, 3e8, 1e9, 2e9]) {
      const low = -2147483648 + distance
      const exact = normalQuantile((low + 0.5) / 2 ** 32 + 0.5)
      expect(Math.abs(normalOf(low) / exact - 1)).toBeLessThan(1e-6)
      expect(normalOf(~low)).toBe(-normalOf(low))
    }
    expect(Math.abs(normalOf(-2147483648))).toBeGreaterThan(6.2)
  })

  it('and the plain stepper allocate nothing while stepping', () => {
    const stepper = new PlainXoshiro(DYNAMICS, [1, 2], 0)
    stepper.m.set([0, 0.6, 0.8])
    const go = (steps: number) => {
      for (let k = 0; k < steps; k++) stepper.step(0.1, 1, 1, 1)
    }
    go(20_000)
    const before = process.memoryUsage().heapUsed
    go(1_000_000)
    // One number of eight bytes a step would be 8 MB.
    expect(process.memoryUsage().heapUsed - before).toBeLessThan(4e6)
    const kernel = openKernel()
    const size = kernel.memory.buffer.byteLength
    runAll(kernel, plan(), 0, 40)
    expect(kernel.memory.buffer.byteLength).toBe(size)
  })
})

/** The kernel's noise for the plain stepper: xoshiro128++ seeded from Philox, each word through the exact quantile. */
class PlainXoshiro extends Rk4Stepper {
  private readonly s = new Uint32Array(4)
  private readonly row = new Float64Array(STAGE_LENGTH)
  constructor(private readonly own: Dynamics, key: readonly [number, number], trial: number) {
    super(own, key)
    philox(0, STREAM.noise, trial, 0, key[0], key[1], this.s)
  }

  draw(step: number, drive = 0): void {
    responseOf(this.own)(drive, this.row)
    const scale = Math.sqrt(this.row[STAGE.noise]! / step)
    this.holdNoise(scale * this.normal(), scale * this.normal(), scale * this.normal())
  }

  private normal(): number {
    const { s } = this
    const rotl = (x: number, k: number) => (x << k) | (x >>> (32 - k))
    const word = (rotl((s[0]! + s[3]!) | 0, 7) + s[0]!) | 0
    const t = s[1]! << 9
    s[2]! ^= s[0]!
    s[3]! ^= s[1]!
    s[1]! ^= s[2]!
    s[0]! ^= s[3]!
    s[2]! ^= t
    s[3] = rotl(s[3]!, 11)
    return normalQuantile((word + 0.5) / 2 ** 32 + 0.5)
  }
}
