export interface Notice { id: number, text: string, tone: 'plain' | 'warn' }

/** Short messages at the foot of the page: what went wrong where no form could show it, and what was done. */
export const useNoticesStore = defineStore('notices', () => {
  const notices = ref<Notice[]>([])
  let last = 0

  /** Says it once: the same text is not stacked. */
  function say(text: string, tone: Notice['tone'] = 'plain') {
    notices.value = [...notices.value.filter(notice => notice.text !== text), { id: ++last, text, tone }].slice(-3)
  }
  const dismiss = (id: number) => {
    notices.value = notices.value.filter(notice => notice.id !== id)
  }
  return { notices, say, dismiss }
})
