// The model: its surfaces at an operating point, the delay law, and their intervals.
// A band is { value, low, high }; voltages in V, times in s.

const MODEL = JSON.parse(document.getElementById("model").textContent);
const VOLTAGE_STEPS = 2 ** 20;
const TEMPERATURE_STEPS = 2 ** 10;
const SHAPES = {
  plain: (x) => x,
  reciprocal: (x) => 1 / x,
  reciprocal_square: (x) => 1 / (x * x),
  reciprocal_fourth: (x) => 1 / (x * x * (x * x)),
};
const RELATIVE_STEP = 1e-4; // of the numerical derivatives
const LOG_SMALLEST = -600; // below this ln of an overdrive the law is a straight line

function quantised(x, steps) {
  return Math.floor(x * steps + 0.5) / steps;
}

function operatingPoint(setting) {
  return {
    process: setting.process,
    vdd_v: quantised(setting.vdd, VOLTAGE_STEPS),
    temperature_k: quantised(setting.temp_c + 273.15, TEMPERATURE_STEPS),
    vcm_v: quantised(setting.vcm, VOLTAGE_STEPS),
  };
}

function coordinates(surface, point) {
  const { box } = surface.variants[point.process];
  return surface.axes.map((axis) => {
    const [low, high] = box[axis.condition];
    const clamped = Math.min(Math.max(point[axis.condition], low), high);
    return (SHAPES[axis.shape](clamped) - axis.centre) / axis.half_range;
  });
}

function surfaceTerms(surface, point) {
  const at = coordinates(surface, point);
  return surface.exponents.map((powers) =>
    powers.reduce((product, power, axis) => product * at[axis] ** power, 1));
}

function surfaceValue(surface, point) {
  const terms = surfaceTerms(surface, point);
  const { coefficients } = surface.variants[point.process];
  const sum = terms.reduce((total, term, k) => total + term * coefficients[k], 0);
  return surface.transform === "log" ? Math.exp(sum) : sum;
}

// The variance that a vector of derivatives makes of a covariance; an empty one tells nothing.
function propagated(gradient, covariance) {
  const rows = covariance.map((row, i) =>
    gradient[i] * row.reduce((sum, entry, j) => sum + entry * gradient[j], 0));
  return Math.max(rows.reduce((sum, row) => sum + row, 0), 0);
}

function halfInterval(surface, point) {
  const variance = propagated(surfaceTerms(surface, point), surface.covariance);
  return MODEL.quantiles.normal * Math.sqrt(variance);
}

function plainBand(value, half) {
  return { value, low: value - half, high: value + half };
}

function logarithmicBand(value, half) {
  return { value, low: value * Math.exp(-half), high: value * Math.exp(half) };
}

function offsetBand(point) {
  if (!MODEL.offset) return plainBand(0, 0);
  return plainBand(surfaceValue(MODEL.offset, point), halfInterval(MODEL.offset, point));
}

function sigmaBand(point) {
  if (!MODEL.noise) return plainBand(0, 0);
  return logarithmicBand(surfaceValue(MODEL.noise, point), halfInterval(MODEL.noise, point));
}

// The delay law at a point: [tau, delay at each node].
function delayLaw(point) {
  return [MODEL.delay.tau, ...MODEL.delay.nodes].map((one) => surfaceValue(one, point));
}

// d(delay) / d(ln overdrive) at each node: the parabola through three neighbours, limited so
// that the curve falls wherever its nodes do (F. N. Fritsch, R. E. Carlson, SIAM J. Numer.
// Anal. 17, 1980, 238-246).
function nodeSlopes(logNode, [tau, ...node]) {
  const last = node.length - 1;
  if (last === 0) return [-tau];
  const step = logNode.slice(1).map((x, k) => x - logNode[k]);
  const secant = step.map((h, k) => (node[k + 1] - node[k]) / h);
  const slopes = node.map((_, k) => {
    if (k === 0) return -tau;
    if (k < last) {
      return (step[k] * secant[k - 1] + step[k - 1] * secant[k]) / (step[k] + step[k - 1]);
    }
    if (last === 1) return 2 * secant[0] + tau;
    const bend = (secant[k - 1] - secant[k - 2]) / (step[k - 1] + step[k - 2]);
    return secant[k - 1] + step[k - 1] * bend;
  });
  return slopes.map((slope, k) => {
    const flattest = Math.max(secant[k - 1] ?? -Infinity, secant[k] ?? -Infinity);
    return Math.min(Math.max(slope, 3 * flattest), 0);
  });
}

// Delay at ln of an overdrive: a straight line of slope -tau below the first node (H. Veendrick,
// IEEE J. Solid-State Circuits 15, 1980, 169-176), cubic between nodes, level above the last.
function lawDelay(law, logOverdrive) {
  const [tau, ...node] = law;
  const logNode = MODEL.delay.node_overdrive_v.map(Math.log);
  const last = node.length - 1;
  if (logOverdrive < logNode[0]) return node[0] + tau * (logNode[0] - logOverdrive);
  if (logOverdrive >= logNode[last]) return node[last];
  let k = 0;
  while (logNode[k + 1] <= logOverdrive) k += 1;
  const slopes = nodeSlopes(logNode, law);
  const h = logNode[k + 1] - logNode[k];
  const s = (logOverdrive - logNode[k]) / h;
  const r = 1 - s;
  return node[k] * (1 + 2 * s) * r * r + node[k + 1] * s * s * (3 - 2 * s)
    + h * s * r * (slopes[k] * r - slopes[k + 1] * s);
}

// ln of half the window that is unresolved after a time: the law read the other way.
function logHalfWindow(law, resolveS) {
  const [tau, ...node] = law;
  const { node_overdrive_v: nodeV } = MODEL.delay;
  let low = Math.log(nodeV[0]);
  let high = Math.log(nodeV[nodeV.length - 1]);
  if (resolveS >= node[0]) return low - (resolveS - node[0]) / tau;
  if (resolveS < node[node.length - 1]) return Infinity;
  for (let k = 0; k < 60; k += 1) {
    const middle = 0.5 * (low + high);
    if (lawDelay(law, middle) > resolveS) low = middle;
    else high = middle;
  }
  return 0.5 * (low + high);
}

// Half the delay's interval, and -d(delay) / d(ln overdrive), both in s.
function delayError(point, law, logOverdrive) {
  const here = Math.max(logOverdrive, LOG_SMALLEST);
  const gradient = law.map((number, k) => {
    const [up, down] = [1 + RELATIVE_STEP, 1 - RELATIVE_STEP].map((factor) => {
      const moved = law.slice();
      moved[k] = number * factor;
      return lawDelay(moved, here);
    });
    return (up - down) / (2 * RELATIVE_STEP);
  });
  gradient[0] += law[0] * Math.max(LOG_SMALLEST - logOverdrive, 0);
  const [lower, upper] = [1 - RELATIVE_STEP, 1 + RELATIVE_STEP].map((factor) =>
    lawDelay(law, here + Math.log(factor)));
  const { tau, scatter, leverage, lack_of_fit: lackOfFit } = MODEL.delay;
  const weight = leverage.length ? propagated(surfaceTerms(tau, point), leverage) : 1;
  const { student, normal } = MODEL.quantiles;
  const variance = student ** 2 * weight * propagated(gradient, scatter)
    + normal ** 2 * propagated(gradient, lackOfFit);
  const slope = Math.max((lower - upper) / (2 * RELATIVE_STEP), 1e-6 * law[0]);
  return { half: Math.sqrt(variance), slope };
}

function delayBand(point, overdriveV) {
  const law = delayLaw(point);
  const logOverdrive = Math.log(Math.max(overdriveV, MODEL.delay.floor_v));
  const value = lawDelay(law, logOverdrive);
  return logarithmicBand(value, delayError(point, law, logOverdrive).half / value);
}

function logHalfWindowBand(point, resolveS) {
  const law = delayLaw(point);
  const value = logHalfWindow(law, resolveS);
  if (value === Infinity) return plainBand(value, 0);
  const { half, slope } = delayError(point, law, value);
  return plainBand(value, half / slope);
}
