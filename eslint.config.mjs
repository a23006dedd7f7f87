import { createConfigForNuxt } from '@nuxt/eslint-config/flat'

/** Forbids imports by pattern, with the reason shown to whoever wrote one. */
const forbid = (...patterns) => ({
  'no-restricted-imports': ['error', { patterns: patterns.map(([group, message]) => ({ group, message })) }],
})

const ROOMS = {
  app: ['**/app/**', '~/**', '@/**', '~~/app/**', '@@/app/**', '#app', '#app/**', '#components', '#imports'],
  server: ['**/server/**', '~~/server/**', '@@/server/**', '#server/**'],
  workers: ['**/workers/**', '~~/workers/**', '@@/workers/**'],
  http: ['h3', 'nitropack', 'nitropack/**', '#imports', '#nitro/**', 'nuxt', 'nuxt/**'],
  relativeShared: ['**/../shared/**', '~~/shared/**', '@@/shared/**'],
}
const one = [ROOMS.relativeShared, 'Shared code is imported as #shared/… everywhere outside shared.']

export default createConfigForNuxt({
  features: {
    standalone: true,
    stylistic: { indent: 2, quotes: 'single', semi: false, braceStyle: 'stroustrup', commaDangle: 'always-multiline' },
  },
  dirs: { src: ['app'], pages: ['app/pages'], layouts: ['app/layouts'], components: ['app/components'], composables: ['app/composables'], utils: ['app/utils'] },
})
  .prepend({ ignores: ['.nuxt/**', '.output/**', '.data/**', 'dist/**', 'node_modules/**', 'coverage/**', 'public/**', '**/*.d.ts', 'shared/kernels/generated.ts', 'shared/kernels/assembly/**'] })
  .append(
    {
      linterOptions: { reportUnusedDisableDirectives: 'error', noInlineConfig: true },
      rules: {
        'no-console': 'off',
        'max-lines': ['error', { max: 350 }],
        '@stylistic/max-statements-per-line': 'off',
        '@stylistic/multiline-ternary': 'off',
        '@stylistic/quote-props': 'off',
        '@stylistic/operator-linebreak': ['error', 'before', { overrides: { '=': 'ignore' } }],
        '@stylistic/member-delimiter-style': ['error', {
          multiline: { delimiter: 'none' }, singleline: { delimiter: 'comma', requireLast: false },
        }],
        'import/first': 'error',
      },
    },
    {
      files: ['**/*.{ts,mts,vue}'],
      rules: {
        '@typescript-eslint/no-explicit-any': 'error',
        '@typescript-eslint/ban-ts-comment': 'error',
        'no-restricted-syntax': ['error',
          {
            selector: 'MemberExpression[object.property.name="coerce"][property.name="number"]',
            message: 'z.coerce.number() reads "" and null as 0.',
          }],
      },
    },
    {
      files: ['**/*.vue'],
      rules: {
        'max-lines': ['error', { max: 250 }],
        'vue/multi-word-component-names': 'off',
        'vue/html-self-closing': ['error', { html: { void: 'any', normal: 'any', component: 'any' }, svg: 'any', math: 'any' }],
        'vue/max-attributes-per-line': 'off',
        'vue/multiline-html-element-content-newline': 'off',
        'vue/singleline-html-element-content-newline': 'off',
        'vue/html-closing-bracket-newline': 'off',
        'vue/no-v-html': 'error',
      },
    },
    { files: ['app/**'], rules: forbid([ROOMS.server, 'The browser talks to the server by its API alone.'], [ROOMS.workers, 'The browser never imports a worker.'], one) },
    {
      files: ['app/components/**', 'app/pages/**', 'app/composables/**', 'app/utils/**', 'app/layouts/**'],
      rules: { 'no-restricted-globals': ['error', { name: '$fetch', message: 'Stores alone call the API.' }] },
    },
    {
      files: ['server/**'],
      ignores: ['server/{models,migrations,queue,mail,launch}/**'],
      rules: forbid([ROOMS.app, 'The server never imports from app.'], [ROOMS.workers, 'The server reaches workers by the queue alone.'], one),
    },
    {
      files: ['server/{models,migrations,queue,mail}/**'],
      rules: forbid(
        [ROOMS.app, 'The server never imports from app.'],
        [ROOMS.workers, 'The server reaches workers by the queue alone.'],
        [ROOMS.http, 'Models, migrations, queue and mail are shared with the workers: no HTTP framework here.'],
        [['**/server/api/**', '../api/**', '../utils/**', '../middleware/**', '../plugins/**'], 'Routes use the models, never the other way round.'],
        one,
      ),
    },
    {
      files: ['server/launch/**/*.mjs'],
      rules: {
        'no-restricted-imports': ['error', { patterns: [{ regex: '^(?!node:|\\.)', message: 'The launcher runs before anything is installed: Node built-ins only.' }] }],
      },
    },
    {
      files: ['workers/**'],
      rules: forbid(
        [ROOMS.app, 'Workers never import from app.'],
        [ROOMS.http, 'Workers know no HTTP framework.'],
        [['**/server/api/**', '**/server/utils/**', '**/server/middleware/**', '**/server/plugins/**'], 'Workers use server/models, server/queue and server/mail only.'],
        one,
      ),
    },
    {
      files: ['shared/**'],
      rules: forbid(
        [ROOMS.app, 'Shared code imports nothing outside shared.'],
        [ROOMS.server, 'Shared code imports nothing outside shared.'],
        [ROOMS.workers, 'Shared code imports nothing outside shared.'],
        [['#shared/**'], 'Inside shared, imports are relative.'],
        [['node:*', 'vue', 'h3', 'nuxt'], 'Shared code runs in browser and server alike.'],
      ),
    },
    {
      files: ['shared/numerics/**'],
      // Published coefficients are written with all their digits.
      rules: { 'no-loss-of-precision': 'off' },
    },
    {
      files: ['shared/numerics/**'],
      rules: forbid([['**/physics/**', '**/schemas/**', '../utils/**'], 'Numerics know no physics and no schemas.']),
    },
    { files: ['tests/**'], rules: forbid(one) },
  )
