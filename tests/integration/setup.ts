import type { TestProject } from 'vitest/node'
import type { StackInfo } from './testStack'
import { TestStack } from './testStack'

declare module 'vitest' {
  export interface ProvidedContext {
    stack: StackInfo
  }
}

/** Starts one installation for all tests of a project. */
export default async function setup(project: TestProject) {
  const seed = project.name === 'e2e' ? ['--seed-demo'] : undefined
  const stack = await TestStack.start(project.name, seed ? { seed } : {})
  project.provide('stack', stack.info)
  return () => stack.stop()
}
