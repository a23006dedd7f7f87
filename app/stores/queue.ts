import { queueSchema, type QueueUse } from '#shared/schemas/accounts'

/** Who uses the queue now, and the workers behind it. */
export const useQueueStore = defineStore('queue', () => {
  const api = useApi()
  const queue = ref<QueueUse | null>(null)
  /** When it was read, ISO. */
  const readAt = ref<string | null>(null)

  async function load() {
    queue.value = await api.json('/api/queue', queueSchema)
    readAt.value = new Date().toISOString()
  }

  return { queue, readAt, load }
})
