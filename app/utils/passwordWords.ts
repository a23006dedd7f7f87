import { PASSWORD_LENGTH } from '#shared/utils/passwordRules'

/** The rules of a password, said before one is chosen. */
export const PASSWORD_RULES = `At least ${PASSWORD_LENGTH.least} characters of any kind. Four unrelated words are good; what everybody uses, or your own name, is refused.`
