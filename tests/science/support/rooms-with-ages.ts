/** Shares of old air F(t) of ideal rooms with nominal time 1, their ages in closed form, and tracer records made from them. */

export type IdealRoom = {
  name: string
  exhaust: (t: number) => number
  points: Record<string, { share: (t: number) => number; age: number }>
  /** room mean age, coefficient ε = 1/⟨τ⟩ */
  meanAge: number
}

/** x' = M x from x(0) = (1, 1) for a 2 × 2 matrix with two real eigenvalues: both components at t. */
function twoZones(m: readonly [number, number, number, number]): (t: number) => [number, number] {
  const [a, b, c, d] = m
  const root = Math.sqrt((a - d) ** 2 / 4 + b * c)
  const fast = (a + d) / 2 - root
  const slow = (a + d) / 2 + root
  return (t) => {
    // exp(Mt) = e^(slow t) (M − fast I)/(slow − fast) + e^(fast t) (slow I − M)/(slow − fast)
    const s = Math.exp(slow * t) / (slow - fast)
    const f = Math.exp(fast * t) / (slow - fast)
    return [s * (a + b - fast) + f * (slow - a - b), s * (c + d - fast) + f * (slow - c - d)]
  }
}

export const mixing: IdealRoom = {
  name: 'complete mixing',
  exhaust: (t) => Math.exp(-t),
  points: { P1: { share: (t) => Math.exp(-t), age: 1 } },
  meanAge: 1,
}

export const piston: IdealRoom = {
  name: 'piston',
  exhaust: (t) => (t < 1 ? 1 : 0),
  points: { half: { share: (t) => (t < 0.5 ? 1 : 0), age: 0.5 } },
  meanAge: 0.5,
}

/** n equal tanks in series: F of tank k is the Erlang survival function, its age k/n. */
export function tanks(n: number): IdealRoom {
  const share = (k: number) => (t: number) => {
    let term = 1
    let sum = 1
    for (let i = 1; i < k; i++) {
      term *= (n * t) / i
      sum += term
    }
    return Math.exp(-n * t) * sum
  }
  return {
    name: `${n} tanks in series`,
    exhaust: share(n),
    points: { first: { share: share(1), age: 1 / n } },
    meanAge: (n + 1) / (2 * n),
  }
}

export function unequalTanks(a: number): IdealRoom {
  return {
    name: `unequal tanks ${a}`,
    exhaust: (t) => (a * Math.exp(-t / a) - (1 - a) * Math.exp(-t / (1 - a))) / (2 * a - 1),
    points: { first: { share: (t) => Math.exp(-t / a), age: a } },
    meanAge: 1 - a + a * a,
  }
}

/** Plug-flow part f and a mixed rest, plug first: the mixed part is what the exhaust sees. */
export function plugAndMixed(f: number): IdealRoom {
  const exhaust = (t: number) => (t < f ? 1 : Math.exp(-(t - f) / (1 - f)))
  return { name: `plug ${f} and mixed`, exhaust, points: {}, meanAge: (1 + (1 - f) ** 2) / 2 }
}

/** A share β of the supply goes straight to the exhaust. */
export function bypass(beta: number): IdealRoom {
  const room = (t: number) => Math.exp(-(1 - beta) * t)
  return {
    name: `bypass ${beta}`,
    exhaust: (t) => (t <= 0 ? 1 : (1 - beta) * room(t)),
    points: { room: { share: room, age: 1 / (1 - beta) } },
    meanAge: 1 / (1 - beta),
  }
}

/** Active part m with supply and exhaust, the rest exchanging r Q with it. */
export function deadZone(m: number, r: number): IdealRoom {
  const at = twoZones([-(1 + r) / m, r / m, r / (1 - m), -r / (1 - m)])
  return {
    name: `dead zone ${m}, ${r}`,
    exhaust: (t) => at(t)[0],
    points: {
      active: { share: (t) => at(t)[0], age: 1 },
      dead: { share: (t) => at(t)[1], age: 1 + (1 - m) / r },
    },
    meanAge: 1 + (1 - m) ** 2 / r,
  }
}

/** Lower part a with the supply, upper part with the exhaust, return mixing r Q. */
export function displacement(a: number, r: number): IdealRoom {
  const at = twoZones([-(1 + r) / a, r / a, (1 + r) / (1 - a), -(1 + r) / (1 - a)])
  return {
    name: `displacement ${a}, ${r}`,
    exhaust: (t) => at(t)[1],
    points: { lower: { share: (t) => at(t)[0], age: (r + a) / (1 + r) } },
    meanAge: 1 - (a * (1 - a)) / (1 + r),
  }
}

export const IDEAL_ROOMS: readonly IdealRoom[] = [
  mixing,
  piston,
  tanks(2),
  tanks(3),
  tanks(5),
  tanks(10),
  unequalTanks(0.25),
  unequalTanks(0.3),
  plugAndMixed(0.25),
  plugAndMixed(0.5),
  bypass(0.2),
  bypass(0.5),
  deadZone(0.7, 0.2),
  deadZone(0.8, 0.1),
  displacement(0.5, 0.001),
  displacement(0.5, 0.5),
  displacement(0.4, 0.5),
]

export type RecordPlan = {
  kind: 'decay' | 'step-up'
  /** nominal time, s */
  nominalS: number
  /** sampling step and length in nominal times */
  step: number
  length: number
  background: number
  rise: number
  noise?: () => number
  /** samples before the step */
  before?: number
}

/** Concentrations of a share-of-old-air function, sampled; the step is at t = 0, earlier samples carry negative times. */
export function sampleShare(share: (t: number) => number, plan: RecordPlan): [number, number][] {
  const noise = plan.noise ?? (() => 0)
  const samples: [number, number][] = []
  const count = Math.round(plan.length / plan.step)
  for (let i = -(plan.before ?? 5); i <= count; i++) {
    const t = i * plan.step
    const old = t <= 0 ? 1 : share(t)
    const level = plan.kind === 'decay' ? old : 1 - old
    samples.push([t * plan.nominalS, plan.background + plan.rise * level + noise()])
  }
  return samples
}
