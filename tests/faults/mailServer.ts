import { SMTPServer } from 'smtp-server'

/** How the server meets a mail: takes it; takes it and drops the line before saying so; says "later"; says "never"; says nothing. */
export type Manner = 'takes' | 'takes and is cut' | 'later' | 'never' | 'silent'

/** A mail server of a test, which behaves as it is told and notes what it has taken. */
export class TestMailServer {
  manner: Manner = 'takes'
  /** Message-IDs of the mails taken, in order. */
  readonly taken: string[] = []
  /** Connections made to it. */
  calls = 0
  private server: SMTPServer | undefined

  constructor(private readonly port: number) {}

  async start(): Promise<void> {
    const server = new SMTPServer({
      disabledCommands: ['AUTH', 'STARTTLS'], logger: false, closeTimeout: 500, disableReverseLookup: true,
      onConnect: (_, callback) => {
        this.calls++
        if (this.manner !== 'silent') callback()
      },
      onRcptTo: (_address, _session, callback) => {
        if (this.manner === 'later') return callback(Object.assign(new Error('Come back later'), { responseCode: 451 }))
        if (this.manner === 'never') return callback(Object.assign(new Error('No such mailbox here'), { responseCode: 550 }))
        callback()
      },
      onData: (stream, session, callback) => {
        let text = ''
        stream.on('data', (part: Buffer) => { text += part.toString('latin1') })
        stream.on('end', () => {
          this.taken.push(/^message-id:\s*(\S+)/im.exec(text)?.[1] ?? 'none')
          if (this.manner === 'takes and is cut') {
            for (const connection of server.connections) if (connection.id === session.id) connection.close()
          }
          else callback()
        })
      },
    })
    server.on('error', () => undefined)
    this.server = server
    await new Promise<void>((resolve) => { server.listen(this.port, '127.0.0.1', resolve) })
  }

  async stop(): Promise<void> {
    const { server } = this
    this.server = undefined
    if (server) await new Promise<void>((resolve) => { server.close(resolve) })
  }
}
