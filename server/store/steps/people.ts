/** Step of the database for people; never changed once released. */
export const sql = ''
