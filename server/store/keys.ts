/** A run's number in the store. */
export type RunId = number & { readonly run: unique symbol }

export type Json = null | boolean | number | string | readonly Json[] | { readonly [key: string]: Json }

const perRun = 2 ** 36

/** Key of number `seq` of a run's sequence: 2^36 numbers are 200 years of 10 Hz, 2^17 runs fit below 2^53. */
export const keyOf = (run: RunId, seq: number): number => run * perRun + seq
export const seqOf = (key: number): number => key % perRun
