import { execFileSync, spawnSync } from 'node:child_process'
import { existsSync, mkdtempSync, rmSync } from 'node:fs'
import { tmpdir } from 'node:os'
import { join } from 'node:path'
import { openKernel } from '#shared/kernels/loader'
import { TrialRunner } from '#shared/numerics/trial'
import type { TrialOutcome, TrialPlan } from '#shared/numerics/trial'

export const name = 'kernel beside C++ (skipped where there is no compiler)'

const SOURCE = 'tests/measure/step.cpp'
const COMPILERS = ['g++', 'clang++', 'c++']

/** Nanoseconds for one step of one trial, or null where it cannot be built. */
function cpp(compiler: string, folder: string, width: number, flags: readonly string[]): number | null {
  const program = join(folder, `step${width}`)
  const built = spawnSync(compiler, ['-O3', '-std=c++17', '-fno-math-errno', `-DWIDTH=${width}`, ...flags, SOURCE, '-o', program])
  return built.status === 0 ? Number(execFileSync(program).toString().split(' ')[0]) : null
}

function kernel(): number {
  const dynamics = { damping: 0.01, diagonal: [0, 0, 1], field: [0, 0, 0], reference: [0, 0, 1], torque: { q0: -0.02, q1: 1, q2: 0 }, fieldLikeRatio: 0, noise: 0.03 ** 2 * 0.25 } as const
  const plan: TrialPlan = { dynamics, key: [1, 2], side: 1, start: (_, out) => out.set([0.1, 0, Math.sqrt(0.99)]), watched: [{ start: 0, end: 25_000, from: 1, to: 1, steps: 100_000 }], settling: null }
  const runner = new TrialRunner(plan, openKernel('simd'))
  const outcomes = Array.from({ length: runner.lanes }, (): TrialOutcome => ({ crossing: 0, endsNear: false, settlesNear: false, undecided: false, steps: 0 }))
  let best = Infinity
  for (let run = 0; run < 25; run++) {
    const before = process.cpuUsage()
    runner.run(4 * run, outcomes)
    best = Math.min(best, process.cpuUsage(before).user * 1e3 / (100_000 * runner.lanes))
  }
  return best
}

export async function measure(): Promise<{ metric: string, value: number, unit: string }[]> {
  const compiler = COMPILERS.find(one => spawnSync(one, ['--version']).status === 0)
  const own = kernel()
  const rows = [{ metric: 'SIMD kernel: one step of one trial', value: own, unit: 'ns' }]
  if (compiler === undefined || !existsSync(SOURCE)) return rows
  const folder = mkdtempSync(join(tmpdir(), 'farpole-cpp-'))
  try {
    const narrow = cpp(compiler, folder, 4, process.arch === 'x64' ? ['-msse4.1'] : [])
    if (narrow !== null) rows.push({ metric: `${compiler} -O3, 128-bit vectors`, value: narrow, unit: 'ns' }, { metric: 'kernel against it', value: narrow / own, unit: '×' })
    for (const width of [8, 16]) {
      const wide = cpp(compiler, folder, width, ['-march=native'])
      if (wide !== null) rows.push({ metric: `${compiler} -O3 -march=native, ${32 * width}-bit vectors`, value: wide, unit: 'ns' }, { metric: 'kernel against it', value: wide / own, unit: '×' })
    }
  }
  finally {
    rmSync(folder, { recursive: true, force: true })
  }
  return rows
}
