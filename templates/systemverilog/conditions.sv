
  // -- Quantities under the conditions ----------------------------------------------------------
{% if temperature.maps or supply.maps or common_mode.maps %}
  // Every quantity is a polynomial in coordinates x of the conditions, which are clamped to where
  // it was characterised. t, v, c are temperature, supply and common mode, digits their powers.
  // Polynomials are folded one condition at a time, so that only what has changed is repeated.
{% endif %}
{% if constants %}

  task take_constants;
{% set paragraphs = constants %}
{% include "systemverilog/paragraphs.sv" %}
  endtask
{% endif %}
{% if temperature.matters %}

  task fold_temperature;
{% if temperature.maps %}
    real clamped;
{% endif %}
    temperature_k = $floor((temperature_c + 273.15) * STEPS_PER_K + 0.5) / STEPS_PER_K;
{% if temperature.warned %}
    if (temperature_k < {{ temperature.warned.low }} - 1.0 / STEPS_PER_K
        || temperature_k > {{ temperature.warned.high }} + 1.0 / STEPS_PER_K) begin
      temperature_warnings = temperature_warnings + 1;
      warn($sformatf("temperature %g degC is outside %g degC to %g degC and clamped",
                     temperature_c, {{ temperature.warned.low }} - 273.15, {{ temperature.warned.high }} - 273.15));
    end
{% endif %}
{% set paragraphs = temperature.paragraphs %}
{% include "systemverilog/paragraphs.sv" %}
  endtask
{% endif %}
{% if supply.matters %}

  task fold_supply;
{% if supply.maps %}
    real clamped;
{% endif %}
{% if fixed_supply %}
    vdd_v = {{ fixed_supply }};  // the middle of its range, for lack of a pin
{% else %}
    vdd_changed = 1'b0;
    vdd_v = $floor({{ pins.vdd }} * STEPS_PER_V + 0.5) / STEPS_PER_V;
{% endif %}
{% if supply.warned %}
    if (vdd_v < {{ supply.warned.low }} - 1.0 / STEPS_PER_V
        || vdd_v > {{ supply.warned.high }} + 1.0 / STEPS_PER_V) begin
      supply_warnings = supply_warnings + 1;
      if (supply_warnings == 1) begin
        warn($sformatf("supply %g V is outside %g V to %g V and clamped",
                       vdd_v, {{ supply.warned.low }}, {{ supply.warned.high }}));
      end
    end
{% endif %}
{% set paragraphs = supply.paragraphs %}
{% include "systemverilog/paragraphs.sv" %}
  endtask
{% endif %}
