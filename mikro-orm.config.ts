import { ormOptions } from './lib/db/options'

const url = process.env.DATABASE_URL
if (!url) throw new Error('Set DATABASE_URL to the PostgreSQL database the command is to work on.')

export default ormOptions(url)
