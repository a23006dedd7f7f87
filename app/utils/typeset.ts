export interface TypesetPiece { kind: 'text' | 'sup' | 'sub', text: string }

const SUPERSCRIPTS = '⁰¹²³⁴⁵⁶⁷⁸⁹⁻⁺'
const PLAIN = '0123456789−+'
const RUN = /([⁰¹²³⁴⁵⁶⁷⁸⁹⁻⁺]+)|(?<=\p{L})_([A-Za-z0-9]+)/gu

/** Splits text at runs of superscript characters and at indices written with an underscore, as in "10⁻³" and "I_c0". */
export function typesetPieces(text: string): TypesetPiece[] {
  const pieces: TypesetPiece[] = []
  let from = 0
  for (const match of text.matchAll(RUN)) {
    if (match.index > from) pieces.push({ kind: 'text', text: text.slice(from, match.index) })
    pieces.push(match[1] === undefined
      ? { kind: 'sub', text: match[2]! }
      : { kind: 'sup', text: [...match[1]].map(c => PLAIN[SUPERSCRIPTS.indexOf(c)]).join('') })
    from = match.index + match[0].length
  }
  if (from < text.length) pieces.push({ kind: 'text', text: text.slice(from) })
  return pieces
}
