/** Runs `read` once for a navigation; what the API refuses becomes the error page with the same status. */
export async function usePageData(key: string, read: () => Promise<unknown>) {
  await callOnce(key, async () => {
    try {
      await read()
    }
    catch (error) {
      if (error instanceof ProblemError && error.status !== 401) {
        throw createError({ statusCode: error.status || 503, statusMessage: error.problem.title, fatal: true })
      }
      throw error
    }
  }, { mode: 'navigation' })
}
