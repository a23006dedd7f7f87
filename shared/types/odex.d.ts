/** The parts of odex (Hairer & Wanner's extrapolation code) that are used here; its own sources fail strict types. */
export class Solver {
  constructor(n: number)
  denseOutput: boolean
  absoluteTolerance: number | number[]
  relativeTolerance: number | number[]
  maxSteps: number
  initialStepSize: number
  maxStepSize: number
  solve(
    f: (x: number, y: number[]) => number[],
    x0: number, y0: number[], xEnd: number,
    solOut?: (n: number, xOld: number, x: number, y: number[], dense: (component: number, x: number) => number) => boolean | undefined,
  ): { y: number[], outcome: number, nStep: number, xEnd: number }
}
