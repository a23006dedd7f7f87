/** What the catcher keeps of a mail besides its envelope. */
export interface ReadMail { subject: string, text: string, html: string }

interface Part { headers: Map<string, string>, body: string }

/**
 * Subject, text and HTML of a message as mail programs send them (RFC 5322, MIME): encoded words, quoted-printable and
 * base64, parts within parts. What a mail does not have is empty. `bytes` is taken byte for byte.
 */
export function readMail(bytes: Buffer): ReadMail {
  const whole = split(bytes.toString('latin1'))
  const found: ReadMail = { subject: decodeWords(whole.headers.get('subject') ?? ''), text: '', html: '' }
  for (const part of leaves(whole)) {
    const type = typeOf(part)
    if (type === 'text/plain' && found.text === '') found.text = textOf(part)
    if (type === 'text/html' && found.html === '') found.html = textOf(part)
  }
  return found
}

function split(message: string): Part {
  const [, head = '', body = ''] = /^([\s\S]*?)(?:\r?\n){2}([\s\S]*)$/.exec(message) ?? ['', message]
  const headers = new Map<string, string>()
  for (const line of head.replace(/\r?\n[ \t]+/g, ' ').split(/\r?\n/)) {
    const colon = line.indexOf(':')
    if (colon > 0) headers.set(line.slice(0, colon).trim().toLowerCase(), line.slice(colon + 1).trim())
  }
  return { headers, body }
}

const typeOf = ({ headers }: Part): string => (headers.get('content-type') ?? 'text/plain').split(';')[0]!.trim().toLowerCase()
const parameter = ({ headers }: Part, name: string): string | undefined =>
  new RegExp(`${name}="?([^";]+)"?`, 'i').exec(headers.get('content-type') ?? '')?.[1]

function leaves(part: Part): Part[] {
  const boundary = parameter(part, 'boundary')
  if (!typeOf(part).startsWith('multipart/') || boundary === undefined) return [part]
  const [, ...sections] = `\r\n${part.body}`.split(`\r\n--${boundary}`)
  return sections.filter(section => !section.startsWith('--')).flatMap(section => leaves(split(section.replace(/^[ \t]*\r?\n/, ''))))
}

function textOf(part: Part): string {
  const encoding = (part.headers.get('content-transfer-encoding') ?? '7bit').toLowerCase()
  const bytes = encoding === 'base64' ? Buffer.from(part.body, 'base64') : Buffer.from(encoding === 'quoted-printable' ? unquote(part.body) : part.body, 'latin1')
  const charset = parameter(part, 'charset')?.toLowerCase()
  return bytes.toString(charset === 'iso-8859-1' || charset === 'us-ascii' ? 'latin1' : 'utf8').replace(/\r\n/g, '\n')
}

/** Quoted-printable to the bytes that it stands for, as latin1 text. */
const unquote = (text: string): string =>
  text.replace(/[ \t]+(?=\r?\n)/g, '').replace(/=\r?\n/g, '').replace(/=([0-9A-F]{2})/gi, (_, hex: string) => String.fromCharCode(Number.parseInt(hex, 16)))

/** Encoded words of a header (RFC 2047); the space between two of them is not part of the text. */
function decodeWords(header: string): string {
  return header.replace(/\?=\s+=\?/g, '?==?').replace(/=\?([^?]+)\?([BQ])\?([^?]*)\?=/gi, (_, charset: string, encoding: string, text: string) => {
    const bytes = encoding.toUpperCase() === 'B' ? Buffer.from(text, 'base64') : Buffer.from(unquote(text.replace(/_/g, ' ')), 'latin1')
    return bytes.toString(/^utf-?8$/i.test(charset) ? 'utf8' : 'latin1')
  })
}
