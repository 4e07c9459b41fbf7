import { simpleParser } from 'mailparser'
import { SMTPServer } from 'smtp-server'
import type { CaughtMail } from '#shared/contracts/development.ts'
import type { Mailbox } from '../dependencies.ts'

const mailsMax = 200

/** A mail server on loopback that keeps what it gets, for development and tests. */
export interface FakeMailServer extends Mailbox {
  readonly smtpUrl: string
  close(): Promise<void>
}

export async function startFakeMailServer(clock: () => Date): Promise<FakeMailServer> {
  const mails: CaughtMail[] = []
  let count = 0
  const server = new SMTPServer({
    disabledCommands: ['AUTH', 'STARTTLS'],
    // On loopback there is no name to look up, and offline nobody to ask.
    disableReverseLookup: true,
    onData(stream, _session, done) {
      simpleParser(stream).then(mail => {
        const text = mail.text ?? ''
        const to = Array.isArray(mail.to) ? mail.to : mail.to === undefined ? [] : [mail.to]
        mails.unshift({
          id: String(++count),
          from: mail.from?.text ?? '',
          to: to.flatMap(list => list.value.map(address => address.address ?? '')),
          subject: mail.subject ?? '',
          text,
          links: text.match(/https?:\/\/[^\s<>"]+/g) ?? [],
          caughtAt: clock().toISOString(),
        })
        mails.length = Math.min(mails.length, mailsMax)
        done()
      }, done)
    },
  })
  // A client that breaks off is its own affair.
  server.on('error', () => {})
  await new Promise<void>((resolve, reject) => {
    server.once('error', reject)
    server.listen(0, '127.0.0.1', resolve)
  })
  const address = server.server.address()
  const port = typeof address === 'object' && address !== null ? address.port : 0
  return {
    smtpUrl: `smtp://127.0.0.1:${port}`,
    list: () => Promise.resolve([...mails]),
    close: () => new Promise(resolve => server.close(() => resolve())),
  }
}
