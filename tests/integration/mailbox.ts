import { caughtMailListSchema } from '#shared/schemas/accounts'
import type { CaughtMail } from '#shared/schemas/accounts'
import type { Client } from './harness'
import { signIn, waitFor } from './harness'

let reader: Promise<Client> | undefined

/** Mails to an address that the catcher has kept, newest first, read as the demo's page does. */
export async function mailsTo(email: string): Promise<CaughtMail[]> {
  const client = await (reader ??= signIn('student'))
  const { mails } = caughtMailListSchema.parse(await (await client.get('/api/demo-mail')).json())
  return mails.filter(mail => mail.to.includes(email))
}

/** Waits until so many mails to an address have come; answers the newest. */
export async function mailTo(email: string, count = 1): Promise<CaughtMail> {
  const mails = await waitFor(`mail ${count} to ${email}`, async () => {
    const all = await mailsTo(email)
    return all.length >= count && all
  }, 30_000, 300)
  return mails[0]!
}

/** The token in a mail's link, checked to be the same in both of its forms. */
export function tokenIn(mail: CaughtMail): string {
  const token = /#token=([\w-]+)/.exec(mail.text)?.[1]
  if (token === undefined || !mail.html.includes(`#token=${token}"`)) throw new Error(`The mail “${mail.subject}” has no link.`)
  return token
}
