// How often decisions fail, in natural logarithms of probabilities. A decision compares
// distance + sigma z, z standard normal, with zero; it is unresolved within the half window.

const SMALLEST_SIGMA_V = 1e-300; // stands for no noise
const FEW = legendreRule(8);
const MANY = legendreRule(32);
const PARTS = [-1, -0.5, 0.5, 1]; // of its half interval, by which a fitted number is moved

// ln(1 - p), keeping its digits for every p.
function logRest(logP) {
  return logP < -Math.LN2 ? Math.log1p(-Math.exp(logP)) : Math.log(-Math.expm1(logP));
}

function logUnresolved(distance, sigma, logHalf) {
  const middle = Math.abs(distance) / sigma;
  const logReach = logHalf - Math.log(sigma);
  const reach = Math.exp(logReach);
  if (logReach + Math.log(Math.max(middle, 1)) < -Math.LN2) {
    // A narrow window is integrated about its middle, where a difference would cancel.
    const relative = FEW.reduce((sum, { node, weight }) => {
      const t = reach * node;
      return sum + 0.5 * weight * Math.exp(-middle * t - 0.5 * t * t);
    }, 0);
    return Math.LN2 + logReach + Math.log(relative) - 0.5 * middle * middle - LOG_SQRT_TWO_PI;
  }
  const [upper, lower] = [logNormalBelow(reach - middle), logNormalBelow(-reach - middle)];
  return upper === -Infinity ? upper : upper + logRest(lower - upper);
}

// The integral of Phi(t / sigma) up to x.
function ramp(x, sigma) {
  const z = x / sigma;
  return x * normalBelow(z) + sigma * normalDensity(z);
}

function logErrorUniform(span, sigma, halfWindow) {
  const half = Math.min(halfWindow, 0.5 * span + 40 * sigma);
  const total = 2 * (ramp(half, sigma) - ramp(half - 0.5 * span, sigma));
  return Math.min(Math.log(total / span), 0);
}

// W / S well inside the span (H. Veendrick 1980); else the mean over the shorter of window and
// span of the chance to be inside the longer.
function logUnresolvedUniform(span, sigma, logHalf) {
  const halfSpan = 0.5 * span;
  const half = Math.min(Math.exp(logHalf), halfSpan + 40 * sigma);
  const [shorter, longer] = [Math.min(half, halfSpan), Math.max(half, halfSpan)];
  let mean;
  if (shorter < 4 * sigma) {
    mean = MANY.reduce((sum, { node, weight }) => {
      const e = shorter * node;
      const share = normalBelow((longer - e) / sigma) - normalBelow((-longer - e) / sigma);
      return sum + 0.5 * weight * share;
    }, 0);
  } else {
    // The integral's large terms are taken out: ramp(x) = x + ramp(-x).
    mean = 1 - (ramp(shorter - longer, sigma) - ramp(-shorter - longer, sigma)) / shorter;
  }
  return Math.min(Math.min(logHalf, Math.log(halfSpan)) - Math.log(halfSpan) + Math.log(mean), 0);
}

// Logarithms of the probabilities of one set of fitted numbers.
function failures(setting, { sigma, logHalf }) {
  const noise = Math.max(sigma, SMALLEST_SIGMA_V);
  const half = Math.exp(logHalf);
  if (setting.kind === "span") {
    return {
      noise: logErrorUniform(setting.input, noise, 0),
      unresolved: logUnresolvedUniform(setting.input, noise, logHalf),
      either: logErrorUniform(setting.input, noise, half),
    };
  }
  return {
    noise: logNormalBelow(-setting.input / noise),
    unresolved: logUnresolved(setting.input, noise, logHalf),
    either: logNormalBelow((half - setting.input) / noise),
  };
}

// Each fitted number moved within its interval, the others as they are.
function movedNumbers(sigma, window) {
  const here = { sigma: sigma.value, logHalf: window.value };
  const halfSigma = sigma.value > 0 ? Math.log(sigma.high / sigma.value) : 0;
  const halfWindow = Number.isFinite(window.value) ? window.high - window.value : 0;
  return {
    here,
    cases: [
      PARTS.map((part) => ({ ...here, sigma: here.sigma * Math.exp(part * halfSigma) })),
      PARTS.map((part) => ({ ...here, logHalf: here.logHalf + part * halfWindow })),
    ],
  };
}

// The interval that independent causes give together: falls and rises are added in squares
// apart (G. Y. Zou, A. Donner, Statistics in Medicine 27, 2008, 1693-1702).
function inSquares(value, ends) {
  const lowest = ends.map((end) => Math.min(value, ...end));
  const highest = ends.map((end) => Math.max(value, ...end));
  if (!Number.isFinite(value)) return [Math.min(...lowest), Math.max(...highest)];
  return [
    value - Math.hypot(...lowest.map((low) => value - low)),
    value + Math.hypot(...highest.map((high) => high - value)),
  ];
}

function log10Band(logP, moved) {
  const quantiles = moved.map((cases) => cases.map((one) => normalQuantile(Math.min(one, 0))));
  const [low, high] = inSquares(normalQuantile(Math.min(logP, 0)), quantiles);
  return {
    value: logP / Math.LN10,
    low: logNormalBelow(low) / Math.LN10,
    high: logNormalBelow(high) / Math.LN10,
  };
}

function withInterval(band, known) {
  return known ? band : { value: band.value, low: NaN, high: NaN };
}

function timeBetween(unresolved, clockHz) {
  const wait = (log10P) => -(Math.log10(clockHz) + log10P);
  return {
    value: wait(unresolved.value), low: wait(unresolved.high), high: wait(unresolved.low),
  };
}

// Everything that can be said at a setting; null where it was not characterised.
function predict(setting) {
  const point = operatingPoint(setting);
  const noisy = MODEL.noise !== null && setting.noise;
  const waits = MODEL.delay !== null;
  const knowNoise = !noisy || MODEL.noise.covariance.length > 0;
  const knowDelay = !waits || MODEL.delay.scatter.length + MODEL.delay.lack_of_fit.length > 0;
  const sigma = noisy ? sigmaBand(point) : plainBand(0, 0);
  const window = waits ? logHalfWindowBand(point, setting.resolve) : plainBand(-Infinity, 0);
  const { here, cases } = movedNumbers(sigma, window);
  const found = failures(setting, here);
  const moved = cases.map((numbers) => numbers.map((one) => failures(setting, one)));
  const band = (name) =>
    log10Band(found[name], moved.map((of) => of.map((failure) => failure[name])));
  const unresolved = withInterval(band("unresolved"), knowDelay);
  const toWindow = (logHalf) => (logHalf + Math.LN2) / Math.LN10;
  return {
    noise_error: noisy ? withInterval(band("noise"), knowNoise) : null,
    unresolved: waits ? unresolved : null,
    error: waits ? withInterval(band("either"), knowNoise && knowDelay) : null,
    mtbf: waits ? timeBetween(unresolved, setting.clock) : null,
    delay: waits && setting.kind === "overdrive"
      ? withInterval(delayBand(point, setting.input), knowDelay) : null,
    window: waits ? withInterval({
      value: toWindow(window.value), low: toWindow(window.low), high: toWindow(window.high),
    }, knowDelay && Number.isFinite(window.value)) : null,
    sigma: noisy ? withInterval(sigma, knowNoise) : null,
    offset: MODEL.offset
      ? withInterval(offsetBand(point), MODEL.offset.covariance.length > 0) : null,
  };
}
