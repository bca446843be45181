/**
 * What crosses the network. Types only; pages take them with `import type`. Times are ms since 1970 UTC, names end in their unit,
 * null is what is not known.
 *
 *   GET  /api/openapi.json                                   the description of all below
 *   GET  /api/session    POST, DELETE                       Session: who is signed in; sign in with name and password, sign out
 *   POST /api/session/seen                                   Session; somebody is at the page
 *   POST /api/session/password                               Session; the own password
 *   POST /api/links/look ({ token } → LinkFacts)             what a one-time link is for
 *   POST /api/links/use ({ token, name, password } → Session)
 *   GET  /api/people    POST ({ name, role, reason } → OneTimeLink)    PersonFacts[]
 *   POST /api/people/:person/role|disable|enable|reset       a reason each; reset gives a OneTimeLink
 *   GET  /api/service                                        Service
 *   GET  /api/runs                                           RunRow[]
 *   GET  /api/runs/:run                                      RunDetail
 *   GET  /api/runs/:run/state?atMs                           LiveState (of a stored run as at atMs, its end by default)
 *   GET  /api/runs/:run/report                               Report of core/report.ts; of a live run as it stands
 *   GET  /api/runs/:run/trends?fromMs&toMs&buckets&tags      Trends
 *   GET  /api/runs/:run/marks                                Marks
 *   GET  /api/runs/:run/alarms                               AlarmRow[]
 *   GET  /api/runs/:run/alarms/:alarm/before                 AlarmStory: first-out, onset and the 30 min before
 *   GET  /api/runs/:run/alarm-performance?fromMs&toMs        AlarmPerformance
 *   GET  /api/runs/:run/hand-over?fromMs&toMs                HandOver
 *   GET  /api/runs/:run/transitions                          TransitionRow[]
 *   GET  /api/runs/:run/acts    POST (ActSent → ActReply)    ActRow[]
 *   GET  /api/runs/:run/flush-plan?segment&ratio             FlushPlan of core/report.ts
 *   GET  /api/runs/:run/flush                               FlushDetail
 *   GET  /api/runs/:run/export/alarms.csv|alarms.json|samples.csv|events.csv|record.json    downloads
 *   GET  /api/skids/:skid/settings                           SettingsPage
 *   GET  /api/skids/:skid/settings/compare?from&to           SettingsComparison
 *   POST /api/skids/:skid/settings (SettingsSent → ActReply) a change of settings on the live run
 *   GET  /api/runs/:run/trail?from&limit&person&groups&fromMs&toMs&onlyNew    Trail of a run
 *   GET  /api/trail?from&limit&person&groups&fromMs&toMs&onlyNew             Trail of the site
 *   POST /api/trail/reviews (TrailReviewSent → Trail)        looked through as far as the counts say
 *   POST /api/uploads (UploadBody → Upload)                  begins an upload: the skid file and the events as text
 *   PUT  /api/uploads/:upload/logs/:name (the file's bytes as application/octet-stream → Upload)   one for each log file
 *   POST /api/uploads/:upload/import (→ RunRow, state importing)   what was uploaded becomes a run; it appears in GET /api/runs
 *   WS   /ws                                                 ClientMessage, ServerMessage
 */
export type * from './act.ts'
export type * from './alarm.ts'
export type * from './alarm-story.ts'
export type * from './comparison.ts'
export type * from './flush.ts'
export type * from './live.ts'
export type * from './people.ts'
export type * from './performance.ts'
export type * from './run.ts'
export type * from './service.ts'
export type * from './settings.ts'
export type * from './skid.ts'
export type * from './socket.ts'
export type * from './trail.ts'
export type * from './trend.ts'
export type * from './upload.ts'
