/** Columns that can be left out of the list; state and question are always there. */
export const COLUMNS = [
  { key: 'ready', name: 'Ready' },
  { key: 'who', name: 'Who' },
  { key: 'asked', name: 'Asked' },
  { key: 'ended', name: 'Ended' },
  { key: 'preset', name: 'Preset' },
  { key: 'cpu', name: 'CPU time' },
] as const
export type ColumnKey = typeof COLUMNS[number]['key']

export const FIRST_COLUMNS: readonly ColumnKey[] = ['ready', 'who', 'asked', 'cpu']

/** Columns as a cookie remembers them; whatever is no column is left out. */
export function readColumns(value: unknown): ColumnKey[] {
  if (typeof value !== 'string') return [...FIRST_COLUMNS]
  const named = value.split('.')
  return COLUMNS.filter(({ key }) => named.includes(key)).map(({ key }) => key)
}
