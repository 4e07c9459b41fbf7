// The yardstick of the API bench: Express and pg, no more, running the same statements and answering their last rows.
import express from 'express'
import pg from 'pg'

const { url, statements } = JSON.parse(process.env.BARE_SERVER ?? '{}')
const pool = new pg.Pool({ connectionString: url, max: 10 })
const app = express()
app.get('/read', async (_request, response) => {
  let rows = []
  for (const { text, values } of statements) rows = (await pool.query({ text, values, rowMode: undefined })).rows
  response.json(rows[0])
})
const server = app.listen(0, '127.0.0.1', () => process.stdout.write(`BARE_READY ${server.address().port}\n`))
process.stdin.on('end', () => process.exit(0))
process.stdin.resume()
