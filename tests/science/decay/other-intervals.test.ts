import { expect, it } from 'vitest'
import { lagOne, neweyWest, praisWinsten, regressedOnLast } from '../support/line-intervals'

/** Data D2 of the methods page: true rate 1.2/h, background 420 ppm, every five minutes. */
const ppm = [
  1220, 1150, 1084, 1023, 973, 910, 859, 809, 773, 747, 715, 690, 652, 633, 608, 603, 590, 578, 560, 549, 539,
  523, 509, 500, 489,
]
const hours = ppm.map((_, i) => i / 12)
const logExcess = ppm.map((value) => Math.log(value - 420))
const near = (value: number, expected: number) => expect(Math.abs(value / expected - 1)).toBeLessThan(1e-5)

it('T10: Newey–West on D2 (derived value; the effective-sample interval of T9, .0298, is what the product builds on)', () => {
  near(neweyWest(hours, logExcess, 2).slopeSe, 0.0168303)
  near(neweyWest(hours, logExcess, 2).slopeSe * Math.sqrt(25 / 23), 0.0175468)
  near(neweyWest(hours, logExcess, 0).slopeSe, 0.0124723)
})

it('T11: Prais–Winsten on D2, one step and iterated (derived values)', () => {
  const plain = neweyWest(hours, logExcess, 0)
  near(lagOne(plain.residuals), 0.60673)
  const once = praisWinsten(hours, logExcess, lagOne(plain.residuals))
  near(-once.slope, 1.197767)
  near(once.slopeSe, 0.020072)
  let phi = regressedOnLast(plain.residuals)
  for (let i = 0; i < 50; i++) phi = regressedOnLast(praisWinsten(hours, logExcess, phi).residuals)
  const last = praisWinsten(hours, logExcess, phi)
  near(phi, 0.752911)
  near(-last.slope, 1.204824)
  near(last.slopeSe, 0.027071)
})
