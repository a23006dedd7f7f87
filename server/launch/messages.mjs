/** A fault that its message explains in full: shown without a stack trace. */
export class LaunchError extends Error {}

/** Says one line to whoever started the command. On stderr, so that stdout stays free for results. */
export function say(line) {
  process.stderr.write(`${line}\n`)
}

/** How long something took, in words. */
export function seconds(since) {
  return `${((performance.now() - since) / 1000).toFixed(1)} s`
}

/**
 * Runs a command's main function: explained faults end with their message and code 1,
 * unexpected ones with one line and the place where the details were written.
 */
export async function runMain(main, noteDetails) {
  try {
    return await main()
  }
  catch (error) {
    process.exitCode = 1
    if (error instanceof LaunchError) {
      say(`\n${error.message}`)
      return undefined
    }
    const place = noteDetails?.(error instanceof Error ? error.stack ?? error.message : String(error))
    say(`\nThis went wrong unexpectedly: ${error instanceof Error ? error.message : String(error)}${place ? `\nDetails are in ${place}.` : ''}`)
    return undefined
  }
}
