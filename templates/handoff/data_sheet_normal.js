// The normal distribution in both tails, as logarithms, so that nothing underflows.
// M. Abramowitz, I. A. Stegun, Handbook of Mathematical Functions, 1964.

const LOG_SQRT_TWO_PI = 0.5 * Math.log(2 * Math.PI);
const SERIES_REACH = 3;

function normalDensity(z) {
  return Math.exp(-0.5 * z * z - LOG_SQRT_TWO_PI);
}

// Phi(-z) / phi(z) for z of at least SERIES_REACH: continued fraction 26.2.14.
function upperTailOverDensity(z) {
  let fraction = 0;
  for (let k = 60; k > 0; k -= 1) fraction = k / (z + fraction);
  return 1 / (z + fraction);
}

// (Phi(z) - 1/2) / phi(z) for smaller z: series 26.2.11.
function bodyOverDensity(z) {
  let term = z;
  let sum = z;
  for (let k = 3; k < 100; k += 2) {
    term *= (z * z) / k;
    sum += term;
  }
  return sum;
}

function logNormalBelow(z) {
  if (z > 0) return Math.log1p(-Math.exp(logNormalBelow(-z)));
  if (z > -SERIES_REACH) return Math.log(0.5 + normalDensity(z) * bodyOverDensity(z));
  return Math.log(upperTailOverDensity(-z)) - 0.5 * z * z - LOG_SQRT_TWO_PI;
}

function normalBelow(z) {
  return Math.exp(logNormalBelow(z));
}

// The z whose ln Phi(z) is given. Newton's steps from the left of the root of a concave
// function rise to it; Phi(z) < exp(-z^2 / 2) / 2 for negative z gives such a start.
function normalQuantile(logP) {
  if (logP === -Infinity) return -Infinity;
  if (logP > -Math.LN2) return -normalQuantile(Math.log(-Math.expm1(logP)));
  let z = -Math.sqrt(-2 * logP);
  for (let k = 0; k < 60; k += 1) {
    const logBelow = logNormalBelow(z);
    const step = (logP - logBelow) * Math.exp(logBelow + 0.5 * z * z + LOG_SQRT_TWO_PI);
    z += step;
    if (Math.abs(step) <= 1e-15 * Math.abs(z)) break;
  }
  return z;
}

// Nodes and weights of Gauss and Legendre on -1..1 (25.4.29), by Newton's steps.
function legendreRule(order) {
  const rule = [];
  for (let k = 1; k <= order; k += 1) {
    let x = Math.cos((Math.PI * (k - 0.25)) / (order + 0.5));
    let slope = 0;
    for (let step = 0; step < 20; step += 1) {
      let [before, here] = [1, x];
      for (let n = 2; n <= order; n += 1) {
        [before, here] = [here, ((2 * n - 1) * x * here - (n - 1) * before) / n];
      }
      slope = (order * (x * here - before)) / (x * x - 1);
      x -= here / slope;
    }
    rule.push({ node: x, weight: 2 / ((1 - x * x) * slope * slope) });
  }
  return rule;
}
