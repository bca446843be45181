#!/usr/bin/env node
// `npx clearbore …` inside the checkout: installs and builds what is missing, then hands over to the command line.
import { ensureBuilt, ensureInstalled } from './prepare.js'

ensureInstalled()
await ensureBuilt({ pages: process.argv[2] === 'serve' })
await import('../dist/server/main.js')
