/** What a person may be. The administrator manages people and is independent of the process: no act on a run comes with it. */
export const roles = ['viewer', 'operator', 'engineer', 'reviewer', 'administrator'] as const
export type Role = (typeof roles)[number]

/**
 * What a route asks of who calls it. public: nothing. own: to be signed in, whoever it is. read: to see runs; the rest as named by
 * the roles.
 */
export type Need = 'public' | 'own' | 'read' | 'operate' | 'engineer' | 'review' | 'administer'

const rights: Readonly<Record<Role, readonly Need[]>> = {
  viewer: ['read'],
  operator: ['read', 'operate'],
  engineer: ['read', 'operate', 'engineer'],
  reviewer: ['read', 'review'],
  administrator: ['read', 'administer'],
}

/** Whether a signed-in person of a role may what is needed. */
export const may = (role: Role, need: Need): boolean => need === 'public' || need === 'own' || rights[role].includes(need)

/** Roles that have a right, for the mend of a refusal. */
export const rolesWith = (need: Need): readonly Role[] => roles.filter((role) => may(role, need))
