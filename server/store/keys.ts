/** A run's number in the store. */
export type RunId = number & { readonly run: unique symbol }

export type Json = null | boolean | number | string | readonly Json[] | { readonly [key: string]: Json }

/** No number of a sequence reaches this: 2^36 are 200 years of 10 Hz; 2^17 runs of them fit below 2^53. */
export const endOf = 2 ** 36

/** Key of number `seq` of a run's sequence. */
export const keyOf = (run: RunId, seq: number): number => run * endOf + seq
export const seqOf = (key: number): number => key % endOf
