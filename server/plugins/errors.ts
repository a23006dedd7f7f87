import { send } from 'h3'
import { defineNitroPlugin } from 'nitropack/runtime'
import { sendProblem } from '../utils/sendProblem'

/** Answers errors under /api that no route caught with a problem; leaves those of pages to the framework. */
export default defineNitroPlugin((nitroApp) => {
  const { options } = nitroApp.h3App
  const answerPage = options.onError
  options.onError = async (error, event) => {
    if (!event.path.startsWith('/api/')) return answerPage?.(error, event)
    const problem = sendProblem(event, error.cause ?? error)
    if (problem) await send(event, JSON.stringify(problem))
  }
})
