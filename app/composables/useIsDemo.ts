/** Whether this is the demo, which shows its accounts and catches its mail. */
export const useIsDemo = (): boolean => demoAccountsSchema.parse(useRuntimeConfig().public.demoAccounts).length > 0
