import { describe, expect, it } from 'vitest'
import { newPasswordSchema, personNameSchema } from '#shared/schemas/accounts'
import { passwordFault } from '#shared/utils/passwordRules'

describe('a password that is chosen', () => {
  it.each([
    'password', 'Password1234', 'p@ssw0rd2026!', 'PASSWORDPASSWORD', 'qwertyuiop12', 'qwertz123456', '123456789012', '1234567890123456', 'aaaaaaaaaaaa', 'abcabcabcabc',
    'abcdefghijkl', 'zyxwvutsrqpo', 'letmein12345', 'welcome2026!!', 'iloveyou1234', '1qaz2wsx3edc', 'adminadmin12', 'summer-2026!!', 'passwordwelcome', '19840229198402', 'farpole123456',
  ])('is refused when it is tried first: %s', password => expect(passwordFault(password)).toMatch(/\.$/))

  it.each([
    'correct gander battery stapler', 'Zwölf Boxkämpfer jagen', 'x9$Kq2!vLm4Rw', 'mein Hund frisst Magnete', 'tower river candle moss', '7 grey herons on a pole', 'wachsendes moos im garten 3',
  ])('is welcome when it is not: %s', password => expect(passwordFault(password)).toBeNull())

  it('is refused when it is little more than the owner’s name or address', () => {
    expect(passwordFault('iris.vale@example.org', ['Iris Vale', 'iris.vale@example.org'])).toContain('your own name')
    expect(passwordFault('IrisVale20261', ['Iris Vale', 'iris@example.org'])).toContain('your own name')
    expect(passwordFault('the vale of seven herons', ['Iris Vale', 'iris@example.org'])).toBeNull()
  })

  it('has 12 to 256 characters, and reads the same however its letters are composed', () => {
    expect(newPasswordSchema.safeParse('x9$Kq2!vLm4').success).toBe(false)
    expect(newPasswordSchema.safeParse('tower river moss '.repeat(15)).success).toBe(true)
    expect(newPasswordSchema.safeParse('tower river moss '.repeat(16)).success).toBe(false)
    expect(newPasswordSchema.parse('Zwo\u0308lf Boxka\u0308mpfer')).toBe(newPasswordSchema.parse('Zw\u00F6lf Boxk\u00E4mpfer'))
  })
})

describe('a person’s name', () => {
  it.each(['Petra Lund', 'Łucja Żak', '李 明', 'Ana-María d’Ors', 'می‌خواهم', '<b>Bobby</b>'])('may be %s', name => expect(personNameSchema.parse(` ${name} `)).toBe(name.normalize('NFC')))

  it.each([['a line break', 'Iris\r\nBcc: all@example.org'], ['a null', 'Iris\0'], ['a turned direction', 'Iris \u202Evale'], ['no letter', ' – '], ['nothing', ''], ['a separator', 'Iris\u2028Vale']])(
    'may not have %s', (_, name) => expect(personNameSchema.safeParse(name).success).toBe(false))
})
