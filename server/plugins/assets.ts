import { setResponseHeaders } from 'h3'
import { defineNitroPlugin } from 'nitropack/runtime'

/** A web worker lives under the policy of its own script, and only there may WebAssembly be compiled. */
const POLICY = 'default-src \'none\'; script-src \'self\' \'wasm-unsafe-eval\'; connect-src \'self\''

/** Gives the built scripts a policy of their own and keeps browsers from guessing what they are. */
export default defineNitroPlugin((nitroApp) => {
  nitroApp.hooks.hook('request', (event) => {
    if (event.path.startsWith('/_nuxt/')) setResponseHeaders(event, { 'Content-Security-Policy': POLICY, 'X-Content-Type-Options': 'nosniff' })
  })
})
