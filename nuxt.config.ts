/** odex ships sources that strict types reject. */
const typed = {
  compilerOptions: { paths: { odex: ['../shared/types/odex.d.ts'] } },
  // AssemblyScript has types of its own.
  exclude: ['../shared/kernels/assembly'],
}

export default defineNuxtConfig({
  modules: ['@pinia/nuxt', '@nuxtjs/tailwindcss', 'nuxt-auth-utils', 'nuxt-security', '@vueuse/nuxt'],
  devtools: { enabled: false },
  runtimeConfig: {
    public: { demoAccounts: new Array<{ email: string, password: string, role: string }>() },
    // Name, secret and Secure flag of the cookie are set from the settings when the server starts.
    session: {
      name: 'farpole-session',
      password: '',
      sessionHeader: false,
      cookie: { sameSite: 'lax', httpOnly: true, secure: true, path: '/', maxAge: 30 * 86_400 },
    },
  },
  compatibilityDate: '2026-11-01',
  nitro: { typescript: { tsConfig: typed } },
  typescript: { strict: true, tsConfig: typed, nodeTsConfig: typed, sharedTsConfig: typed },
  telemetry: false,
  auth: { loadStrategy: 'none' },
  security: {
    strict: true,
    xssValidator: false,
    corsHandler: false,
    rateLimiter: false,
    // Bodies are counted as they arrive, see server/utils/requests.ts.
    requestSizeLimiter: false,
    removeLoggers: false,
    headers: {
      contentSecurityPolicy: {
        'default-src': ['\'none\''],
        'base-uri': ['\'none\''],
        'connect-src': ['\'self\''],
        'font-src': ['\'self\''],
        'form-action': ['\'self\''],
        'frame-ancestors': ['\'none\''],
        'frame-src': ['\'none\''],
        'img-src': ['\'self\'', 'data:', 'blob:'],
        'manifest-src': ['\'self\''],
        'media-src': ['\'none\''],
        'object-src': ['\'none\''],
        'script-src': ['\'self\'', '\'strict-dynamic\'', '\'nonce-{{nonce}}\''],
        'script-src-attr': ['\'none\''],
        // In development Vite adds style elements that carry no nonce.
        'style-src': process.env.NODE_ENV === 'development' ? ['\'self\'', '\'unsafe-inline\''] : ['\'self\'', '\'nonce-{{nonce}}\''],
        'style-src-attr': ['\'unsafe-inline\''],
        'worker-src': ['\'self\'', 'blob:'],
        'upgrade-insecure-requests': false,
      },
      crossOriginEmbedderPolicy: false,
      crossOriginOpenerPolicy: 'same-origin',
      crossOriginResourcePolicy: 'same-origin',
      referrerPolicy: 'no-referrer',
      // Chromium does not know this one and says so in the console.
      permissionsPolicy: { 'web-share': false },
      strictTransportSecurity: { maxAge: 31_536_000, includeSubdomains: true, preload: false },
      xFrameOptions: 'DENY',
      xContentTypeOptions: 'nosniff',
    },
  },
  tailwindcss: { cssPath: '~/assets/css/tailwind.css', viewer: false },
})
