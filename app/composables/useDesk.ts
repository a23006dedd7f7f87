import type { InjectionKey, UnwrapNestedRefs } from 'vue'
import type { openDesk } from '~/utils/bench/desk'

/** A desk as templates use it. */
export type Desk = UnwrapNestedRefs<ReturnType<typeof openDesk>>
const DESK: InjectionKey<Desk> = Symbol('desk')

/** Lets the forms below the calling component fill another desk than the bench's. */
export const provideDesk = (desk: Desk) => provide(DESK, desk)

/** The desk that the forms here fill: the bench's, unless another was provided. */
export const useDesk = (): Desk => inject<Desk | null>(DESK, null) ?? useDraftStore()
