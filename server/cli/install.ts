import { existsSync, readFileSync } from 'node:fs'
import { fileURLToPath } from 'node:url'

/** Folders of this installation, the same from the bundle (dist/server) and from the source (server/cli). */
const at = (path: string): string => fileURLToPath(new URL(`../../${path}`, import.meta.url))

export const toolVersion = (): string => (JSON.parse(readFileSync(at('package.json'), 'utf8')) as { version: string }).version
export const demoSkidFile = (): string => at('fixtures/skids/heron.yaml')
/** The built pages; null where they have not been built. */
export const webRoot = (): string | null => (existsSync(at('dist/web/index.html')) ? at('dist/web') : null)
