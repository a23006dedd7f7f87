/** The numbers are well-formed but describe no device or run that can be computed; `path` leads to the field at fault. */
export class PhysicsError extends Error {
  constructor(readonly path: readonly (string | number)[], message: string) {
    super(message)
    this.name = 'PhysicsError'
  }
}
