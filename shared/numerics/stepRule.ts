/**
 * Longest step of the fourth-order scheme whose numerical damping biases the write error by no more than is allowed.
 *
 * One RK4 step turns e^λ (λ = (i + growth) ω Δt) into e^(λ − λ⁵/120 + λ⁶/144 …). With y = ω Δt the growth rate of the
 * precession cone is then wrong by −y⁵/144 per step and, in proportion to the true growth, by y⁴/24. Over a reduced time τ
 * the exponent 2τ of the write error carries both. A thermal field held over a step is weaker for a precessing moment than the white one,
 * by |e^λ − 1|²/|λ|² ≈ 1 − y²/12, and the write error rises at most in proportion:  bias ≈ 2τ [y⁵/(144 α) + |i − 1| y⁴/24] + y²/12.
 */
export interface StepRule {
  /** y = ω Δt */
  phaseStep: number
  from: 'bias' | 'phase'
}

/** Above this the fourth-order expansion behind the rule no longer holds and single turns are poorly resolved. */
export const LARGEST_PHASE_STEP = 0.35

/** Predicted relative bias of the write error at y = ω Δt. */
export function writeErrorBias(y: number, damping: number, reducedTime: number, excessDrive: number): number {
  return 2 * reducedTime * (y ** 5 / (144 * damping) + Math.abs(excessDrive) * y ** 4 / 24) + y * y / 12
}

/**
 * @param damping α
 * @param reducedTime τ = α γ0 H_k t/(1+α²) of the pulse
 * @param excessDrive i − 1
 * @param biasAllowed relative, for example 0.01
 */
export function longestStep(damping: number, reducedTime: number, excessDrive: number, biasAllowed: number): StepRule {
  if (writeErrorBias(LARGEST_PHASE_STEP, damping, reducedTime, excessDrive) <= biasAllowed) return { phaseStep: LARGEST_PHASE_STEP, from: 'phase' }
  let low = 0
  let high = LARGEST_PHASE_STEP
  for (let n = 0; n < 60; n++) {
    const middle = (low + high) / 2
    if (writeErrorBias(middle, damping, reducedTime, excessDrive) <= biasAllowed) low = middle
    else high = middle
  }
  return { phaseStep: low, from: 'bias' }
}
