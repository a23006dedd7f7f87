const EVERY_MS = 15_000

/**
 * Reads something anew now and then while the page is in view. When the server cannot be reached the page keeps what it shows;
 * the end of the session and faults are handled as everywhere.
 */
export function useReadAgain(read: () => Promise<unknown>, everyMs = EVERY_MS) {
  const visibility = useDocumentVisibility()
  let reading = false
  useIntervalFn(async () => {
    if (visibility.value !== 'visible' || reading) return
    reading = true
    try {
      await read()
    }
    catch (error) {
      if (!(error instanceof ProblemError) || error.status === 401) throw error
    }
    finally {
      reading = false
    }
  }, everyMs)
}
