import { startServing, type Watched } from '../../server/cli/serving.ts'
import type { Store } from '../../server/store/open.ts'

/** A demo server in this process, on any free port and without pages; a fault that would end it fails the test. */
export const serveQuietly = (store: Store, watched: readonly Watched[]) =>
  startServing({
    store,
    watched,
    isDemo: true,
    host: '127.0.0.1',
    port: 0,
    tryPorts: 0,
    webRoot: null,
    toolVersion: 'test',
    log: () => undefined,
    onFatal: (error) => {
      throw error
    },
    beatMs: 50,
  })
