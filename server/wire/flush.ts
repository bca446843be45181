import type { Course } from '../core/flush/course-state.ts'
import type { FlushPlan } from '../core/report.ts'

export type { Call, Course, CourseStep, Point, PointState, Recovery, Refusal } from '../core/flush/course-state.ts'

/** `GET /api/runs/:run/flush`: the flush under way or the last one, with the plan it follows; nulls before any. */
export interface FlushDetail {
  readonly course: Course | null
  readonly plan: FlushPlan | null
}
