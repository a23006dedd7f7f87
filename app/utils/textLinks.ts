export type TextPiece = { kind: 'text' | 'link', text: string }

/** Cuts plain text into words and web addresses, losing nothing. Punctuation that ends a sentence is no part of an address. */
export function textLinks(text: string): TextPiece[] {
  const pieces: TextPiece[] = []
  let from = 0
  for (const match of text.matchAll(/https?:\/\/[^\s<>"]+/g)) {
    const address = match[0].replace(/[.,;:!?)\]]+$/, '')
    if (match.index > from) pieces.push({ kind: 'text', text: text.slice(from, match.index) })
    pieces.push({ kind: 'link', text: address })
    from = match.index + address.length
  }
  if (from < text.length) pieces.push({ kind: 'text', text: text.slice(from) })
  return pieces
}
