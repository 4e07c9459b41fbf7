import { createServer } from 'node:net'
import { expect, it } from 'vitest'
import { choosePort, isFree } from '../../../scripts/lib/ports.mjs'

const freeBut = (...taken: number[]) => async (port: number) => !taken.includes(port)

it('takes the first free port from 3000 when none is asked for', async () => {
  expect(await choosePort({}, freeBut())).toBe(3000)
  expect(await choosePort({ PORT: '' }, freeBut(3000, 3001))).toBe(3002)
})

it('takes the port that is asked for, or says that it is in use; never another one in silence', async () => {
  expect(await choosePort({ PORT: '8080' }, freeBut(3000))).toBe(8080)
  await expect(choosePort({ PORT: '8080' }, freeBut(8080))).rejects.toThrow('Port 8080 is in use')
})

it.each(['abc', '-1', '80.5', '65536', '1e3'])('refuses the port %s', async port => {
  await expect(choosePort({ PORT: port }, freeBut())).rejects.toThrow('PORT is')
})

it('sees a port that somebody listens on', async () => {
  const server = createServer()
  const port = await new Promise<number>(resolve => {
    server.listen(0, '127.0.0.1', () => {
      const address = server.address()
      resolve(typeof address === 'object' && address !== null ? address.port : 0)
    })
  })
  expect(await isFree(port)).toBe(false)
  await new Promise(resolve => server.close(resolve))
  expect(await isFree(port)).toBe(true)
})
