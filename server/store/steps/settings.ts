/** Step of the database for settings; never changed once released. */
export const sql = ''
