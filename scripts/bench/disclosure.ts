import { DISCLOSURES, type Disclosure } from '@/lib/method/orders'

/** The value of `--disclosure`. @throws RangeError where there is none of that name */
export function disclosureOf(name: string): Disclosure {
  const disclosure = DISCLOSURES.find((one) => one === name)
  if (!disclosure) throw new RangeError(`no disclosure ${name}: ${DISCLOSURES.join(', ')}`)
  return disclosure
}
