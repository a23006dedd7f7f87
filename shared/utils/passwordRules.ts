/** Fewest and most characters of a password. Long ones are welcome: a sentence is easier to keep than a riddle. */
export const PASSWORD_LENGTH = { least: 12, most: 256 } as const

/** Words that passwords are made of most often, in lower case and in letters alone. */
const COMMON = new Set(`
password passwort passphrase motdepasse contrasena senha wachtwoord parola kennwort geheim secret secreto mypassword thepassword newpassword oldpassword
pass pwd login logon admin administrator root user username guest test testing tester testtest default system server changeme change letmein
welcome willkommen bienvenue hello helloworld hellohello goodmorning iloveyou iloveyouforever loveyou iloveme ihateyou lovelove teamo jetaime tequiero
monkey dragon master shadow sunshine princess football baseball basketball soccer hockey superman batman spiderman starwars pokemon
charlie michael jennifer jordan jessica ashley daniel thomas matthew andrew joshua anthony nicole michelle samantha elizabeth alexander alexandra
computer internet samsung google facebook linkedin microsoft windows apple iphone android youtube
qwerty qwertyuiop qwertz qwertzuiop azerty azertyuiop asdfgh asdfghjkl zxcvbn zxcvbnm qazwsx qazwsxedc qweasd qweasdzxc asdfjkl abcdef abcdefg abcdefgh
abcdefghij alphabet trustno trustnoone whatever freedom nothing access private mustang corvette mercedes porsche ferrari harley liverpool chelsea arsenal barcelona
summer winter spring autumn monday friday january february march april june july august september october november december
money business company office killer hunter ranger cowboy cookie cheese chocolate banana flower butterfly summertime correcthorsebatterystaple
blink forever family friends friendship angel heaven jesus jesuschrist blessed genesis
farpole quill quilllab spintorque magnetic magnetization tunneljunction
`.trim().split(/\s+/))

const ROWS = ['abcdefghijklmnopqrstuvwxyz', '01234567890123456789', 'qwertyuiopasdfghjklzxcvbnm', 'qwertzuiopasdfghjklyxcvbnm', 'azertyuiopqsdfghjklmwxcvbn', '1qaz2wsx3edc4rfv5tgb6yhn7ujm', '1q2w3e4r5t6y7u8i9o0p']
const LOOK_ALIKES: Record<string, string> = { '0': 'o', '1': 'i', '3': 'e', '4': 'a', '5': 's', '7': 't', '8': 'b', '@': 'a', '$': 's', '!': 'i', '+': 't' }

const reversed = (text: string) => [...text].reverse().join('')
const lettersOf = (text: string) => text.replace(/[^a-z]/g, '')

/** The shortest part that a text is a repetition of: the text itself when it is none. */
function unitOf(text: string): string {
  const at = (text + text).indexOf(text, 1)
  return text.slice(0, at)
}

/** Whether a text is one run along the alphabet, the digits or the rows of a keyboard, either way. */
const isRun = (text: string) => ROWS.some(row => row.includes(text) || reversed(row).includes(text))

/** Whether letters are one common word, or two put together. */
function isCommon(letters: string): boolean {
  if (COMMON.has(letters)) return true
  for (let cut = 3; cut <= letters.length - 3; cut++) {
    if (COMMON.has(letters.slice(0, cut)) && COMMON.has(letters.slice(cut))) return true
  }
  return false
}

/**
 * Why a password would be among the first that somebody tries, in words for its owner; null when it would not.
 * Looks through doubling, digits and signs put round a word, and signs put for letters. `own`: name and address of its owner.
 */
export function passwordFault(password: string, own: readonly string[] = []): string | null {
  const text = password.toLowerCase()
  const unit = unitOf(text)
  if (unit.length <= 3 || isRun(unit)) return 'This repeats or counts on: anyone would try it. Choose something longer to guess, such as four unrelated words.'
  const plain = [...unit].map(sign => LOOK_ALIKES[sign] ?? sign).join('')
  const core = unit.replace(/^[^a-z]+|[^a-z]+$/g, '')
  const plainCore = [...core].map(sign => LOOK_ALIKES[sign] ?? sign).join('')
  const readings = [unit, core, plain, plainCore].map(lettersOf)
  if (readings.some(letters => letters.length <= 3)) {
    if (/^[\d\s.,:/-]+$/.test(unit)) return 'Digits alone are tried quickly. Add words to them.'
  }
  if (readings.some(letters => letters !== '' && (isCommon(letters) || isCommon(unitOf(letters)) || isRun(letters)))) {
    return 'This is one of the passwords that are tried first. Choose something else, such as four unrelated words.'
  }
  const parts = own.flatMap(value => [value.toLowerCase(), ...value.toLowerCase().split(/[\s@]+/)]).filter(part => part.length >= 4)
  const rest = parts.reduce((left, part) => left.replaceAll(part, ''), text)
  if (rest.length < text.length && rest.replace(/[^a-z]/g, '').length < 6) return 'This is little more than your own name or address. Choose something that others do not know of you.'
  return null
}
