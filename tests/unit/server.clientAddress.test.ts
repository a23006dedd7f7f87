import { describe, expect, it } from 'vitest'
import { forwardedAddress } from '../../server/utils/clientAddress'

describe('the address that proxies forward', () => {
  it('is what the outermost proxy of ours saw, whatever the visitor wrote before it', () => {
    expect(forwardedAddress('203.0.113.7', 1)).toBe('203.0.113.7')
    expect(forwardedAddress('1.2.3.4, 203.0.113.7', 1)).toBe('203.0.113.7')
    expect(forwardedAddress('1.2.3.4,203.0.113.7 , 10.0.0.2', 2)).toBe('203.0.113.7')
    expect(forwardedAddress('203.0.113.7', 2)).toBeUndefined()
    expect(forwardedAddress(undefined, 1)).toBeUndefined()
    expect(forwardedAddress('', 1)).toBeUndefined()
  })
})
