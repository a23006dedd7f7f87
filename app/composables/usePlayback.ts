/** Wall time of one pass over the shown span, ms. */
const PASS_MS = 9000

/**
 * Plays a time forward while `playing` is true, by animation frames that exist only then; stops at the end and starts anew from there.
 * @param span start and end of what is shown, s
 */
export function usePlayback(time: Ref<number>, span: () => { start: number, end: number }) {
  const playing = ref(false)
  let frame = 0
  let before = 0

  const advance = (now: number) => {
    const { start, end } = span()
    const next = time.value + (end - start) * Math.min(100, now - before) / PASS_MS
    before = now
    time.value = Math.min(end, next)
    if (next >= end) return pause()
    frame = requestAnimationFrame(advance)
  }

  function play() {
    const { start, end } = span()
    if (playing.value || !(end > start)) return
    if (time.value >= end - (end - start) * 1e-6) time.value = start
    playing.value = true
    before = performance.now()
    frame = requestAnimationFrame(advance)
  }

  function pause() {
    cancelAnimationFrame(frame)
    playing.value = false
  }

  onBeforeUnmount(pause)
  return { playing: readonly(playing), play, pause, toggle: () => playing.value ? pause() : play() }
}
