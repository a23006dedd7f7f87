import { randomUUID } from 'node:crypto'
import { setTimeout as sleep } from 'node:timers/promises'
import { describe, expect, it } from 'vitest'
import { streamEventSchema } from '#shared/schemas/api'
import { signIn, switchingSpec, waitFor } from '../integration/harness'
import { figure, useStage } from './stage'

const RESTARTS = 10

/** What stands before the web servers of an installation: a request that one of them does not take goes to the next. */
class Balancer {
  requests = 0
  passedOn = 0
  private turn = 0

  constructor(private readonly addresses: string[], private readonly headers: Record<string, string>) {}

  /** The whole reply. Throws when no server gives one. */
  async send(method: string, path: string, body?: unknown, headers: Record<string, string> = {}): Promise<{ status: number, json: unknown }> {
    this.requests++
    const reply = await this.open(path, {
      method, headers: { ...headers, ...(body === undefined ? {} : { 'Content-Type': 'application/json' }) }, ...(body === undefined ? {} : { body: JSON.stringify(body) }),
    })
    return { status: reply.status, json: await reply.json() }
  }

  async open(path: string, options: RequestInit & { headers?: Record<string, string> } = {}): Promise<Response> {
    let fault: unknown
    const first = this.turn++
    for (let k = 0; k < this.addresses.length; k++) {
      const address = this.addresses[(first + k) % this.addresses.length] ?? ''
      try {
        return await fetch(address + path, { ...options, headers: { ...this.headers, ...options.headers } })
      }
      catch (error) {
        fault = error
        this.passedOn++
      }
    }
    throw fault
  }
}

/** Follows the event stream over every restart, as a browser does: from the last event on. Answers ids of jobs seen done, each with how often. */
function follow(balancer: Balancer, signal: AbortSignal) {
  const done = new Map<string, number>()
  let streams = 0
  const read = async () => {
    let last = ''
    while (!signal.aborted) {
      try {
        const reply = await balancer.open('/api/events', { signal, headers: last ? { 'Last-Event-ID': last } : {} })
        streams++
        let text = ''
        const reader = reply.body!.pipeThrough(new TextDecoderStream()).getReader()
        for (let part = await reader.read(); !part.done; part = await reader.read()) {
          text += part.value
          const blocks = text.split('\n\n')
          text = blocks.pop() ?? ''
          for (const block of blocks) {
            const field = (name: string) => block.split('\n').find(line => line.startsWith(`${name}: `))?.slice(name.length + 2)
            const data = field('data')
            if (data === undefined) continue
            last = field('id') ?? last
            const event = streamEventSchema.parse({ type: field('event'), ...JSON.parse(data) })
            if (event.type === 'job' && event.job.state === 'done') done.set(event.job.id, (done.get(event.job.id) ?? 0) + 1)
          }
        }
      }
      catch {
        if (!signal.aborted) await sleep(100)
      }
    }
  }
  const ended = read()
  return { done, ended, streams: () => streams }
}

describe('A rolling restart under load', () => {
  const stage = useStage('faults-restart', 2)

  it(`loses no request, no job and no event over ${RESTARTS} restarts of web servers, and of workers beside them`, async () => {
    const { stack } = stage()
    await stage().startWorker()
    await stage().startWorker()
    const { cookie, baseUrl } = await signIn('researcher', stack.info.baseUrl)
    const balancer = new Balancer([stack.webUrl(0), stack.webUrl(1)], { Cookie: cookie, Origin: baseUrl })
    const over = new AbortController()
    const stream = follow(balancer, over.signal)
    const answers = new Map<number | string, number>()
    const jobs: string[] = []
    let restarting = true
    const load = async (seed: number) => {
      for (let k = 0; restarting; k++) {
        const asked = k % 4 === 0
          ? balancer.send('POST', '/api/jobs', switchingSpec({ trials: 50, seed: seed + k }), { 'Idempotency-Key': randomUUID() })
          : balancer.send('GET', '/api/jobs?limit=20')
        const { status, json } = await asked.catch((error: unknown) => ({ status: `no reply: ${String(error)}`, json: null }))
        answers.set(status, (answers.get(status) ?? 0) + 1)
        if (status === 201) jobs.push((json as { id: string }).id)
        await sleep(40)
      }
    }
    const loads = Promise.all([load(1000), load(2000)])
    const drains: number[] = []
    for (let k = 0; k < RESTARTS; k++) {
      const began = performance.now()
      await stack.webs[k % 2]!.stop()
      drains.push(performance.now() - began)
      await stack.startWeb()
      if (k % 4 === 1) {
        const worker = stack.workers.find(({ ended }) => !ended)!
        await worker.stop()
        await stage().startWorker()
      }
    }
    restarting = false
    await loads

    expect(Object.keys(Object.fromEntries(answers)).sort()).toEqual(['200', '201'])
    expect(new Set(jobs).size).toBe(jobs.length)
    for (const id of jobs) expect((await stage().settled(id)).state).toBe('done')
    await waitFor('the stream to have told of every job', () => jobs.every(id => stream.done.has(id)), 15_000)
    over.abort()
    await stream.ended
    figure('rolling restart', `${RESTARTS} web servers and 3 workers restarted, drained in ${drains.map(ms => ms.toFixed(0)).join(', ')} ms; ${balancer.requests} requests, 0 failed, ${balancer.passedOn} passed on to the other server; ${jobs.length} jobs done, all told over ${stream.streams()} streams`)
  })
})
