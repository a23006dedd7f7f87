/** How far a count lies from what is solved, in its standard errors: "1.3 σ more failed". */
export function apartWords(errors: number): string {
  const size = Math.abs(errors).toFixed(1)
  if (size === '0.0') return '0.0 σ apart'
  return `${size} σ ${errors > 0 ? 'above' : 'below'}`
}
