// The page: reads the controls, clamps them, predicts, and writes the numbers with their basis.

const CONDITIONS = [
  ["vdd_v", "supply", (x) => siText(x, "V")],
  ["temperature_k", "temperature", (x) => `${signed((x - 273.15).toFixed(1))}${SPACE}\u00b0C`],
  ["vcm_v", "common mode", (x) => siText(x, "V")],
];
const WRITERS = {
  noise_error: (band) => powerTexts(band, powerText),
  unresolved: (band) => powerTexts(band, powerText),
  error: (band) => powerTexts(band, powerText),
  mtbf: (band) => powerTexts(band, waitText),
  delay: (band) => bandTexts(band, "s"),
  window: (band) => powerTexts(band, voltsText),
  sigma: (band) => bandTexts(band, "V"),
  offset: (band) => bandTexts(band, "V"),
};
const QUIET_MS = 600; // after the last change, before the answer is read out

function element(id) {
  return document.getElementById(id);
}

class Control {
  constructor(field) {
    this.field = field;
    this.slider = element(`${field.id}-slider`);
    this.said = element(`${field.id}-said`);
    this.low = Number(field.min);
    this.high = Number(field.max);
    this.logarithmic = this.slider !== null && this.slider.dataset.logarithmic === "true";
    this.number = field.valueAsNumber;
  }

  // Takes what was typed; says so where something else is computed with.
  read() {
    const typed = this.field.valueAsNumber;
    const kept = Number.isNaN(typed) ? this.number : typed;
    this.number = Math.min(Math.max(kept, this.low), this.high);
    let said = "";
    if (Number.isNaN(typed)) said = "Not a number";
    else if (typed < this.low) said = "Below the range";
    else if (typed > this.high) said = "Above the range";
    this.said.textContent = said
      && `${said}: computed at ${signed(String(this.number))}${SPACE}${this.field.dataset.unit}.`;
    this.field.setAttribute("aria-invalid", String(said !== ""));
    this.showSlider();
    return this.number * Number(this.field.dataset.scale);
  }

  showSlider() {
    if (this.slider === null) return;
    this.slider.value = this.logarithmic ? Math.log10(this.number) : this.number;
    this.slider.setAttribute("aria-valuetext", `${this.number} ${this.field.dataset.unit}`);
  }

  slide() {
    const place = Number(this.slider.value);
    const number = this.logarithmic ? (10 ** place).toPrecision(3) : place.toPrecision(4);
    this.field.value = Math.min(Math.max(number, this.low), this.high);
  }
}

const CONTROLS = new Map(
  [...document.querySelectorAll("#calculator input[type=number]")].map((field) =>
    [field.id, new Control(field)]));

function chosen(name, otherwise) {
  const found = document.querySelector(`#calculator [name=${name}]:checked`);
  return found ? found.value : otherwise;
}

function readSetting() {
  const read = (name) => (CONTROLS.has(name) ? CONTROLS.get(name).read() : NaN);
  const kind = chosen("kind", "overdrive");
  return {
    process: element("process").value,
    vdd: read("vdd"),
    temp_c: read("temp_c"),
    vcm: read("vcm"),
    kind,
    input: read(kind),
    resolve: read("resolve"),
    clock: read("clock"),
    noise: chosen("noise", "off") === "on",
  };
}

function showResults(found) {
  for (const [name, write] of Object.entries(WRITERS)) {
    const row = element(`result-${name}`);
    const band = found[name];
    row.hidden = band === null;
    if (band === null) continue;
    const [value, interval] = write(band);
    row.querySelector(".value").textContent = value;
    row.querySelector(".interval").textContent = interval;
    Object.assign(row.dataset, band);
  }
}

// Quantities that were not measured at this point are taken where they were.
function rangeNotes(setting) {
  const point = operatingPoint(setting);
  const surfaces = [["Delay", MODEL.delay && MODEL.delay.tau], ["Noise", MODEL.noise],
    ["Offset", MODEL.offset]];
  return surfaces.filter(([, surface]) => surface).flatMap(([quantity, surface]) => {
    const { box } = surface.variants[point.process];
    return CONDITIONS.filter(([name]) => box[name]).flatMap(([name, words, write]) => {
      const [low, high] = box[name];
      const slack = 1e-5 * Math.max(Math.abs(low), Math.abs(high));
      if (point[name] >= low - slack && point[name] <= high + slack) return [];
      const range = low === high ? write(low) : `${write(low)} \u2026 ${write(high)}`;
      return [`${quantity} is characterised at ${words} ${range} in this process and taken there.`];
    });
  });
}

// How far the answer goes beyond what was counted and tabulated.
function lawNotes(setting, found) {
  const { sigmas, overdrive_v: smallest, resolve_s: longest } = MODEL.evidence;
  const notes = [];
  if (found.sigma && setting.kind === "overdrive") {
    const used = `${powerText(Math.log10(setting.input / found.sigma.value))} sigmas`;
    const counted = sigmas === null ? "none were counted" : `${sigmas.toFixed(1)} were counted`;
    notes.push(`The noise law is used at ${used}; ${counted}.`);
  }
  if (found.window && smallest !== null) {
    const half = found.window.value - Math.log10(2);
    const beyond = Math.log10(smallest) - half;
    if (half === Infinity) notes.push("No tabulated overdrive resolves so soon.");
    else if (beyond > 0.05) {
      notes.push(`The delay law is used ${beyond.toFixed(1)} decades of overdrive below the `
        + `table (half a window of ${voltsText(half)}; table from ${siText(smallest, "V")}).`);
    }
  }
  if (setting.resolve > longest && longest !== null) {
    notes.push(`No table reaches ${siText(setting.resolve, "s")}; the longest time in one is `
      + `${siText(longest, "s")}.`);
  }
  if (setting.resolve * setting.clock > 1) {
    notes.push("The time given to resolve is longer than a clock period.");
  }
  return notes;
}

function answerWords(found) {
  const parts = [["error", "wrong or unresolved"], ["noise_error", "wrong by noise"],
    ["delay", "delay"], ["mtbf", "mean time between failures"]];
  const shown = parts.filter(([name]) => found[name])
    .filter(([name]) => name !== "noise_error" || !found.error);
  return shown.map(([name, words]) => `${words} ${WRITERS[name](found[name])[0]}`).join("; ");
}

let answering = 0;

function announce(found) {
  clearTimeout(answering);
  answering = setTimeout(() => {
    element("answer").textContent = `At this setting: ${answerWords(found)}.`;
  }, QUIET_MS);
}

function update() {
  const setting = readSetting();
  for (const kind of ["overdrive", "span"]) {
    element(`control-${kind}`).hidden = kind !== setting.kind;
  }
  const found = predict(setting);
  showResults(found);
  element("notes").replaceChildren(...[...rangeNotes(setting), ...lawNotes(setting, found)]
    .map((note) => Object.assign(document.createElement("li"), { textContent: note })));
  announce(found);
}

function start() {
  const calculator = element("calculator");
  calculator.addEventListener("input", (event) => {
    for (const control of CONTROLS.values()) if (event.target === control.slider) control.slide();
    update();
  });
  // On leaving a field it shows the number that is computed with.
  calculator.addEventListener("change", (event) => {
    const control = CONTROLS.get(event.target.id);
    if (control) control.field.value = control.number;
  });
  calculator.hidden = false;
  update();
}

start();
