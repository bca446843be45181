/** Codes are for programs; a new kind of mistake gets a new code. */
export type ErrorCode =
  | 'BASELINE_FILE'
  | 'CONFIG_RANGE'
  | 'CSV_EMPTY'
  | 'CSV_BINARY'
  | 'CSV_HEADER'
  | 'CSV_DELIMITER'
  | 'CSV_TIME'
  | 'CSV_LINE'
  | 'EVENTS_FILE'
  | 'FILE_READ'
  | 'FILE_WRITE'
  | 'FLUID_RANGE'
  | 'FLUID_UNKNOWN'
  | 'HYDRAULICS_RANGE'
  | 'THERMAL_RANGE'
  | 'RTD_RANGE'
  | 'FLUSH_REFUSED'
  | 'SCORE_CASE'
  | 'SIM_OPTION'
  | 'SKID_FILE'
  | 'STATE_VERSION'
  | 'TAG_UNKNOWN'
  | 'USAGE'
  | 'STORE_OPEN'
  | 'STORE_DATA'
  | 'STORE_SCHEMA_NEWER'
  | 'STORE_LOCKED'
  | 'STORE_CORRUPT'
  | 'DISK_FULL'
  | 'PORT_TAKEN'
  | 'RECORD_FILE'
  | 'UPLOAD'
  | 'RUN_UNKNOWN'
  | 'RUN_ENDED'
  | 'SETTINGS_UNKNOWN'
  | 'ACT_REFUSED'
  | 'TRAIL_REVIEW'
  | 'SIGN_IN_NEEDED'
  | 'SIGN_IN_REFUSED'
  | 'SIGN_IN_WAIT'
  | 'NOT_ALLOWED'
  | 'PERSON_REFUSED'
  | 'PERSON_UNKNOWN'
  | 'LINK_SPENT'
  | 'BUSY'
  | 'TOO_MANY'
  | 'ALARM_UNKNOWN'

/** Where in a file a mistake stands; line and column count from 1. */
export interface Place {
  readonly file: string
  readonly line?: number
  readonly column?: number
}

/**
 * What a developer or operator must fix. `code` is for programs, `message` for people (what was wanted, what came), `hint` says
 * what to do next, `place` where it is. Ordinary days of a skid (a gap, bad quality) are values, not errors.
 */
export class MonitorError extends Error {
  override readonly name = 'MonitorError'
  readonly code: ErrorCode
  readonly hint: string | null
  readonly place: Place | null
  constructor(code: ErrorCode, message: string, more: { hint?: string; place?: Place; cause?: unknown } = {}) {
    super(message, { cause: more.cause })
    this.code = code
    this.hint = more.hint ?? null
    this.place = more.place ?? null
  }

  /** One line: place, what was found and expected, the mend. */
  line(): string {
    const p = this.place
    const where =
      p === null ? '' : `${p.file}${p.line === undefined ? '' : `:${p.line}${p.column === undefined ? '' : `:${p.column}`}`}: `
    return `${where}${this.message}${this.hint === null ? '' : `; ${this.hint}`}`.replace(/\s*\n\s*/g, ' ')
  }
}
