// Numbers as readers write them: engineering prefixes, powers of ten, times in years.

const MINUS = "\u2212";
const SPACE = "\u00a0";
const PREFIXES = ["y", "z", "a", "f", "p", "n", "\u00b5", "m", "", "k", "M", "G", "T"];
const NO_PREFIX = PREFIXES.indexOf("");
const TIMES = [["hours", 3600], ["days", 86400], ["years", 365.25 * 86400]];
const UNIVERSE_YEARS = 13.8e9; // Planck Collaboration, Astronomy & Astrophysics 641, A6, 2020

function signed(text) {
  return text.replace("-", MINUS);
}

function superscript(number) {
  const raised = (digit) => "\u2070\u00b9\u00b2\u00b3\u2074\u2075\u2076\u2077\u2078\u2079"[digit];
  return (number < 0 ? "\u207b" : "") + [...String(Math.abs(number))].map(raised).join("");
}

// The prefix, as a place in PREFIXES, that suits the largest of some numbers.
function prefixOf(values) {
  const largest = Math.max(...values.map(Math.abs));
  if (largest === 0) return NO_PREFIX;
  const place = NO_PREFIX + Math.floor(Math.log10(largest * (1 + 1e-9)) / 3);
  return Math.min(Math.max(place, 0), PREFIXES.length - 1);
}

function siText(value, unit, prefix = prefixOf([value]), digits = 4) {
  const scaled = value / 10 ** (3 * (prefix - NO_PREFIX));
  const decimals = scaled === 0 ? 0 : digits - 1 - Math.floor(Math.log10(Math.abs(scaled)));
  const text = scaled.toFixed(Math.min(Math.max(decimals, 0), digits));
  return `${signed(text)}${SPACE}${PREFIXES[prefix]}${unit}`;
}

// A power of ten, as a plain number near one.
function powerText(log10) {
  if (log10 === -Infinity) return "0";
  if (log10 === Infinity) return "infinite";
  if (log10 >= -3 && log10 < 3) return Number((10 ** log10).toPrecision(3)).toString();
  let exponent = Math.floor(log10);
  let mantissa = (10 ** (log10 - exponent)).toFixed(2);
  if (mantissa === "10.00") [mantissa, exponent] = ["1.00", exponent + 1];
  return `${mantissa}${SPACE}\u00d7${SPACE}10${superscript(exponent)}`;
}

function voltsText(log10) {
  return log10 < -24 ? `${powerText(log10)}${SPACE}V` : siText(10 ** log10, "V");
}

// A time in the unit that people would use; only a bound beyond the age of the universe.
function waitText(log10S) {
  const [, year] = TIMES[2];
  const log10Years = log10S - Math.log10(year);
  if (log10Years > Math.log10(UNIVERSE_YEARS)) {
    if (log10Years === Infinity) return "no failure";
    return `>${SPACE}10${superscript(Math.floor(log10Years))}${SPACE}years`;
  }
  const longer = TIMES.filter(([, length]) => log10S >= Math.log10(2 * length)).pop();
  if (!longer) return log10S < -24 ? `${powerText(log10S)}${SPACE}s` : siText(10 ** log10S, "s");
  return `${powerText(log10S - Math.log10(longer[1]))}${SPACE}${longer[0]}`;
}

function intervalText({ low, high }, write) {
  if (Number.isNaN(low)) return "not known";
  return `${write(low)} \u2026 ${write(high)}`;
}

// Value and interval in one prefix.
function bandTexts(band, unit) {
  const known = [band.value, band.low, band.high].filter(Number.isFinite);
  const write = (value) => siText(value, unit, prefixOf(known));
  return [write(band.value), intervalText(band, write)];
}

function powerTexts(band, write) {
  return [write(band.value), intervalText(band, write)];
}
