import type { JobSummary } from '#shared/schemas/api'
import type { QuestionKind } from '#shared/schemas/job'
import { jobListSchema } from '#shared/schemas/jobList'

/** Questions in the order in which the team's answers are shown. */
export const ANSWERED_QUESTIONS = ['failure', 'switching', 'motion'] as const satisfies readonly QuestionKind[]

const SHOWN = 6

/** The team's newest answers, question by question. */
export const useAnswersStore = defineStore('answers', () => {
  const api = useApi()
  const lists = ref<Partial<Record<QuestionKind, JobSummary[]>>>({})

  async function load(question: QuestionKind) {
    const { jobs } = await api.json('/api/jobs', jobListSchema, { query: { state: 'done', question, limit: SHOWN } })
    lists.value = { ...lists.value, [question]: jobs }
  }
  const loadAll = () => Promise.all(ANSWERED_QUESTIONS.map(load))

  return { lists, loadAll }
})
