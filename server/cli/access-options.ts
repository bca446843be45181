import { readFile } from 'node:fs/promises'
import { isIP } from 'node:net'
import { createSecureContext } from 'node:tls'
import { MonitorError } from '../core/errors.ts'
import { cannotRead } from '../file-trouble.ts'
import { usage, wholeIn } from './options.ts'

const text = { type: 'string' } as const

/** Options of `serve` that say who reaches it how. */
export const accessOptions = {
  'tls-cert': text,
  'tls-key': text,
  'trust-proxy': text,
  'public-url': text,
  idle: text,
  session: text,
  'new-administrator-link': { type: 'boolean' },
} as const

type Values = { readonly [name in Exclude<keyof typeof accessOptions, 'new-administrator-link'>]?: string } & {
  readonly 'new-administrator-link'?: boolean
}

const pem = (file: string): Promise<string> =>
  readFile(file, 'utf8').catch((cause: unknown) => {
    throw cannotRead(file, cause)
  })

async function tlsOf(certFile: string | undefined, keyFile: string | undefined): Promise<{ cert: string; key: string } | null> {
  if (certFile === undefined && keyFile === undefined) return null
  if (certFile === undefined || keyFile === undefined) throw usage('serve', '--tls-cert and --tls-key belong together')
  const tls = { cert: await pem(certFile), key: await pem(keyFile) }
  try {
    createSecureContext(tls)
  } catch (cause) {
    throw new MonitorError('USAGE', `'${certFile}' and '${keyFile}' are no certificate and its key`, {
      hint: 'give both as PEM, the key without a pass phrase',
      cause,
    })
  }
  return tls
}

function publicUrlOf(value: string | undefined): string | null {
  if (value === undefined) return null
  const url = URL.canParse(value) ? new URL(value) : null
  if (url === null || !/^https?:$/.test(url.protocol) || url.pathname !== '/' || url.search !== '' || url.hash !== '')
    throw usage('serve', `--public-url needs an address like https://skids.example, got '${value}'`)
  return url.href
}

/** Address, or address/bits of a net. */
const isNet = (text: string): boolean => {
  const [address = '', bits, ...rest] = text.split('/')
  return isIP(address) !== 0 && rest.length === 0 && (bits === undefined || /^\d{1,3}$/.test(bits))
}

/** What the options say, read and checked. Errors: USAGE, FILE_READ. */
export async function readAccess(v: Values) {
  const trustProxy = v['trust-proxy']?.split(',').map((a) => a.trim()) ?? []
  const wrong = trustProxy.find((a) => !isNet(a))
  if (wrong !== undefined) throw usage('serve', `--trust-proxy needs addresses like 192.0.2.7 or 192.0.2.0/24, got '${wrong}'`)
  const publicUrl = publicUrlOf(v['public-url'])
  if (trustProxy.length > 0 && publicUrl === null)
    throw usage('serve', '--trust-proxy needs --public-url: the address that the proxy is known by')
  return {
    tls: await tlsOf(v['tls-cert'], v['tls-key']),
    trustProxy,
    publicUrl,
    newAdministrator: v['new-administrator-link'] === true,
    people: {
      idleMs: 60_000 * wholeIn('serve', '--idle', v.idle ?? '30', 1, 1440),
      sessionMs: 3_600_000 * wholeIn('serve', '--session', v.session ?? '12', 1, 720),
    },
  }
}
