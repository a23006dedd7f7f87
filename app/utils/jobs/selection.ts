/** Rows chosen in a list, and the row from which a range is drawn. */
export interface Selection { ids: ReadonlySet<string>, anchor: string | null }

export const nothingSelected: Selection = { ids: new Set(), anchor: null }

/** Chooses a row or lets it go. */
export function toggled({ ids }: Selection, id: string): Selection {
  const next = new Set(ids)
  if (!next.delete(id)) next.add(id)
  return { ids: next, anchor: id }
}

/** Chooses all rows from the anchor to `id` beside those chosen already; without an anchor in the list, `id` alone. */
export function extended({ ids, anchor }: Selection, rows: readonly string[], id: string): Selection {
  const from = anchor === null ? -1 : rows.indexOf(anchor)
  const to = rows.indexOf(id)
  if (to < 0) return { ids, anchor }
  if (from < 0) return { ids: new Set([...ids, id]), anchor: id }
  return { ids: new Set([...ids, ...rows.slice(Math.min(from, to), Math.max(from, to) + 1)]), anchor }
}

/** Chooses every row, or none when all are chosen. */
export function pageToggled({ ids, anchor }: Selection, rows: readonly string[]): Selection {
  const all = rows.length > 0 && rows.every(id => ids.has(id))
  return { ids: all ? new Set() : new Set(rows), anchor }
}

/** Lets go of rows that are not in the list any more. */
export function kept(selection: Selection, rows: readonly string[]): Selection {
  const there = new Set(rows)
  const ids = new Set([...selection.ids].filter(id => there.has(id)))
  if (ids.size === selection.ids.size && (selection.anchor === null || there.has(selection.anchor))) return selection
  return { ids, anchor: selection.anchor !== null && there.has(selection.anchor) ? selection.anchor : null }
}

/** The row that a key moves to from `current`; null when the key moves nowhere. */
export function moved(key: string, rows: readonly string[], current: string | null): string | null {
  const at = current === null ? -1 : rows.indexOf(current)
  const to = { ArrowDown: at + 1, ArrowUp: at < 0 ? rows.length - 1 : at - 1, Home: 0, End: rows.length - 1, PageDown: at + 10, PageUp: at - 10 }[key]
  return to === undefined || rows.length === 0 ? null : rows[Math.min(rows.length - 1, Math.max(0, to))]!
}
