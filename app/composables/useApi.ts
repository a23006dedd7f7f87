import type { z } from 'zod'

export interface ApiOptions {
  method?: 'GET' | 'POST' | 'PATCH' | 'PUT' | 'DELETE'
  query?: Record<string, string | number | undefined>
  body?: object
  headers?: Record<string, string>
}

/**
 * The one way to the API: carries the reader's cookie during server rendering, checks the reply against its schema and
 * throws a ProblemError for every refusal. Stores call it; nothing else does.
 */
export function useApi() {
  const request = useRequestFetch()
  const send = async (path: string, options: ApiOptions, responseType: 'json' | 'arrayBuffer'): Promise<unknown> => {
    try {
      return await request<unknown, string>(path, { ...options, responseType, retry: false })
    }
    catch (error) {
      throw toProblemError(error)
    }
  }
  return {
    /** JSON reply of the given shape; `z.void()` for an empty one. */
    json: async <T>(path: string, schema: z.ZodType<T>, options: ApiOptions = {}): Promise<T> => schema.parse(await send(path, options, 'json')),
    /** Binary reply. */
    bytes: async (path: string): Promise<Uint8Array> => {
      const reply = await send(path, {}, 'arrayBuffer')
      if (!(reply instanceof ArrayBuffer)) throw new TypeError(`${path} gave no bytes`)
      return new Uint8Array(reply)
    },
  }
}
