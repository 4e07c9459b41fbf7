import { describe, expect, it } from 'vitest'
import { dataFolderFor } from '../../../scripts/lib/places.mjs'

const ordinary = { checkout: '/home/ida/fanlight', uid: 1000, environment: {}, home: '/home/ida' }

describe('the data folder', () => {
  it('lies in the state folder of an ordinary user', () => {
    expect(dataFolderFor(ordinary)).toMatch(/^\/home\/ida\/\.local\/state\/fanlight\/fanlight-[0-9a-f]{12}$/)
    expect(dataFolderFor({ ...ordinary, environment: { XDG_STATE_HOME: '/state' } })).toMatch(/^\/state\/fanlight\/fanlight-/)
  })
  it('does not follow a relative XDG_STATE_HOME, as the XDG specification says', () => {
    expect(dataFolderFor({ ...ordinary, environment: { XDG_STATE_HOME: 'state' } })).toBe(dataFolderFor(ordinary))
  })
  it('lies outside root\'s home, which the account that runs PostgreSQL cannot enter', () => {
    expect(dataFolderFor({ checkout: '/root/fanlight', uid: 0, environment: { XDG_STATE_HOME: '/root/state' }, home: '/root' })).toMatch(/^\/var\/tmp\/fanlight-fanlight-[0-9a-f]{12}$/)
  })
  it('is another one for each checkout, and the same one each time', () => {
    const one = dataFolderFor(ordinary)
    expect(dataFolderFor({ ...ordinary })).toBe(one)
    expect(dataFolderFor({ ...ordinary, checkout: '/home/ida/work/fanlight' })).not.toBe(one)
  })
  it('has a plain name whatever the checkout is called', () => {
    expect(dataFolderFor({ ...ordinary, checkout: '/home/ida/my "best" checkout; rm' })).toMatch(/\/my-best-checkout-rm-[0-9a-f]{12}$/)
  })
  it('is DATA_DIR where that is given, as a full path', () => {
    expect(dataFolderFor({ ...ordinary, environment: { DATA_DIR: '/srv/fanlight' } })).toBe('/srv/fanlight')
    expect(dataFolderFor({ ...ordinary, environment: { DATA_DIR: 'data' } })).toBe(`${process.cwd()}/data`)
    expect(dataFolderFor({ ...ordinary, environment: { DATA_DIR: '' } })).toBe(dataFolderFor(ordinary))
  })
})
