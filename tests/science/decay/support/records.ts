/** The three records of the methods page: levels in ppm every five minutes, background 420 ppm. */
const minutes = (ppm: number[]) => ({
  timeH: Float64Array.from(ppm, (_, i) => i / 12),
  ppm: Float64Array.from(ppm),
})

export const D1 = minutes([1185, 1121, 1052, 1001, 944, 902, 861, 815, 786, 748, 722, 695, 671])
/** true rate 1.2 per hour, excess 800 ppm, AR(1) noise */
export const D2 = minutes([
  1220, 1150, 1084, 1023, 973, 910, 859, 809, 773, 747, 715, 690, 652, 633, 608, 603, 590, 578, 560, 549, 539,
  523, 509, 500, 489,
])
/** 2.4 per hour until three quarters of an hour, then 0.4 */
export const D3 = minutes([
  1320, 1157, 1023, 914, 824, 751, 691, 642, 602, 569, 564, 559, 555, 550, 546, 542, 538, 534, 530, 527, 523,
  520, 516, 513, 510, 507, 504, 502, 499, 496, 494, 491, 489, 487, 485, 483, 480,
])
