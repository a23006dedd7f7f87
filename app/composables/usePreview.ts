import type { JobSpec } from '#shared/schemas/job'
import { PreviewQueue, type PreviewErrors, type PreviewNumbers, type PreviewPath, type PreviewWorker } from '~/utils/bench/preview'

/**
 * What the browser can say of a draft at once: derived numbers, price and the path without noise, computed in a web worker by the
 * same code as the solver runs. While there is no specification, or the numbers describe no device, the last good one stays.
 */
export function usePreview(spec: () => JobSpec | null, secondsPerTrialStep: () => number) {
  const numbers = shallowRef<PreviewNumbers | null>(null)
  const path = shallowRef<PreviewPath | null>(null)
  const errors = shallowRef<PreviewErrors | null>(null)
  /** numbers that are well-formed but describe nothing: where and why */
  const refused = shallowRef<{ path: (string | number)[], message: string } | null>(null)
  const failed = ref<string | null>(null)

  onMounted(() => {
    const queue = new PreviewQueue(
      () => new Worker(new URL('../workers/preview.worker.ts', import.meta.url), { type: 'module' }) as PreviewWorker,
      (reply) => {
        refused.value = reply.kind === 'refused' ? { path: reply.path, message: reply.message } : null
        failed.value = reply.kind === 'failed' ? reply.message : null
        if (reply.kind === 'numbers') numbers.value = reply.numbers
        if (reply.kind === 'path') path.value = reply.path
        if (reply.kind === 'errors') errors.value = reply.errors
      },
    )
    watch([spec, secondsPerTrialStep], ([wanted, price]) => {
      if (wanted) return queue.ask(wanted, price)
      queue.forget()
      refused.value = null
    }, { immediate: true })
    stop = () => queue.end()
  })

  let stop = () => {}
  onBeforeUnmount(() => stop())

  return { numbers, path, errors, refused, failed }
}
