import fc from 'fast-check'

// Every property draws the same cases each time, so that a red test is red for its change and not for its luck. FC_SEED draws others.
fc.configureGlobal({ seed: Number(process.env['FC_SEED'] ?? 20310505) })
