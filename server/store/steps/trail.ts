/** Step of the database for trail; never changed once released. */
export const sql = ''
