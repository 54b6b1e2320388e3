"""Shows a data sheet in a browser, and asks its calculator many things at once."""

from __future__ import annotations

APPLY = """
const results = [];
for (const setting of arguments[0]) {
  for (const [id, value] of Object.entries(setting.fields)) {
    document.getElementById(id).value = value;
  }
  document.getElementById("process").value = setting.process;
  document.querySelector(`[name=kind][value=${setting.kind}]`).checked = true;
  const noise = document.querySelector("[name=noise]");
  if (noise) noise.checked = setting.noise;
  document.getElementById("process").dispatchEvent(new Event("input", { bubbles: true }));
  const rows = {};
  for (const row of document.querySelectorAll(".results tbody tr")) {
    const { value, low, high } = row.dataset;
    rows[row.id.replace("result-", "")] = row.hidden ? null : [value, low, high];
  }
  results.push(rows);
}
return results;
"""


def show(driver, pages, name, *, width=1280, theme="light"):
    driver.get("about:blank")
    driver.execute_cdp_cmd("Emulation.setDeviceMetricsOverride", {
        "width": width, "height": 900, "deviceScaleFactor": 1, "mobile": width < 600})  # fmt: skip
    driver.execute_cdp_cmd("Emulation.setEmulatedMedia", {
        "features": [{"name": "prefers-color-scheme", "value": theme}]})  # fmt: skip
    for log in ("browser", "performance"):
        driver.get_log(log)
    address = (pages / f"{name}.html").as_uri()
    driver.get(address)
    return address
