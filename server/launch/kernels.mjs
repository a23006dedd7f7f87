import { copyFileSync, mkdirSync, readFileSync, writeFileSync } from 'node:fs'
import { join } from 'node:path'
import { runMain } from './messages.mjs'
import { ROOT } from './layout.mjs'
import { run } from './processes.mjs'

// Compiles the AssemblyScript kernels to a module that holds their bytes, so that Node, browser workers and tests load them one way.
const source = join(ROOT, 'shared/kernels/assembly')
const scratch = join(ROOT, 'node_modules/.cache/farpole-kernels')

/** Bytes of the kernel on one kind of vector, in base64. @param {'simd' | 'scalar'} kind */
async function compile(kind) {
  const folder = join(scratch, kind)
  mkdirSync(folder, { recursive: true })
  copyFileSync(join(source, `vector.${kind}.ts`), join(folder, 'vector.ts'))
  copyFileSync(join(source, 'macrospin.ts'), join(folder, 'macrospin.ts'))
  const output = join(folder, 'kernel.wasm')
  const { code } = await run(process.execPath, [
    join(ROOT, 'node_modules/assemblyscript/bin/asc.js'), join(folder, 'macrospin.ts'), '--outFile', output, '-O3', '--runtime', 'stub', '--noAssert',
    '--importMemory', '--initialMemory', '2', '--maximumMemory', '4096', kind === 'simd' ? '--enable' : '--disable', 'simd',
  ], { cwd: ROOT, show: true })
  if (code !== 0) throw new Error(`The ${kind} kernel does not compile.`)
  return readFileSync(output).toString('base64')
}

await runMain(async () => {
  const lines = ['// Made from assembly/ by server/launch/kernels.mjs: not to be edited.']
  for (const kind of /** @type {const} */ (['simd', 'scalar'])) lines.push(`export const ${kind.toUpperCase()}_KERNEL = '${await compile(kind)}'`)
  writeFileSync(join(ROOT, 'shared/kernels/generated.ts'), `${lines.join('\n')}\n`)
})
