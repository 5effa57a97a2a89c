import type { Pattern } from '../../contract/findings.ts'

/** What is said below five trips with a known time. */
export const TOO_FEW: Pattern = { verdict: 'Too few trips with a known time to say.', p: null }
