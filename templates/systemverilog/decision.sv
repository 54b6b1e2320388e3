
  // -- Decision ---------------------------------------------------------------------------------
{% if common_mode.matters %}

  task take_conditions;
{% if common_mode.maps %}
    real clamped;
{% endif %}
    input_lost = vcm_steps - vcm_steps != 0.0;
    if (input_lost) begin
      vcm_step_end = vcm_step;  // nothing is in this range
      lose_input;
    end else begin
{% if supply.matters and not fixed_supply %}
      if (vdd_changed) fold_supply;
{% endif %}
      vcm_step = $floor(vcm_steps);
      vcm_step_end = vcm_step + 1.0;
      vcm_v = vcm_step / STEPS_PER_V;
{% if common_mode.warned %}
      if (vcm_v < {{ common_mode.warned.low }} - 1.0 / STEPS_PER_V ? 1'b1
          : vcm_v > {{ common_mode.warned.high }} + 1.0 / STEPS_PER_V) begin
        common_mode_warnings = common_mode_warnings + 1;
        if (common_mode_warnings == 1) begin
          warn($sformatf("common mode %g V is outside %g V to %g V and clamped",
                         vcm_v, {{ common_mode.warned.low }}, {{ common_mode.warned.high }}));
        end
      end
{% endif %}
{% set paragraphs = common_mode.paragraphs %}
{% filter indent(2, first=true) %}
{% include "systemverilog/paragraphs.sv" %}
{% endfilter %}
    end
  endtask
{% endif %}

  // One of the inputs is infinite or not a number
  task lose_input;
    lose_outputs(3);
    input_warnings = input_warnings + 1;
    if (input_warnings == 1) begin
      warn($sformatf("the input is not a number: %g V and %g V", {{ pins.inp }}, {{ pins.inn }}));
    end
  endtask
{% if memory %}

  // Of the trip point in favour of the previous decision, after such a reset
  task find_shift;
{% if memory.terms %}
    real age;  // in time constants
{% endif %}
    shift_ticks = edge_time - reset_time;
{% if memory.terms %}
    if (shift_ticks != rest_ticks) begin
      rest_ticks = shift_ticks;
{% for term in memory.terms %}
      {{ term.known }} = 1'b0;
{% endfor %}
    end
{% endif %}
{% for term in memory.terms %}
    if (!{{ term.known }}) begin
      age = rest_ticks / TICKS_PER_S / {{ term.tau_s }};
      {{ term.left_v }} = age <= {{ memory.oldest }} ? {{ term.shift_v }} * exact_exp(-age) : 0.0;
      {{ term.known }} = 1'b1;
    end
{% endfor %}
    shift_v = {{ memory.total }};
    if (shift_v > {{ memory.cap_v }}) shift_v = {{ memory.cap_v }};  // no table vouches for more
  endtask
{% endif %}

  // Whether a wait that ends is the one that is meant; to half a tick, since the clock may step
  // between ticks
  function automatic bit is_meant(input bit [2:0] state, input real moment);
    return decision_state == state && is_due(moment);
  endfunction

  function automatic bit is_due(input real moment);
    return moment < $realtime + 0.5;
  endfunction

{% if delay %}
  localparam real FLOOR_V = {{ floor_v }};  // overdrives below are not distinguished
{% endif %}
{% if noise or delay or energy_over_overdrive %}
  real magnitude_v = 0.0;           // of the overdrive
{% if aperture %}
  localparam real LARGEST_V = 1.7976931348623157e308;  // of all finite numbers
{% endif %}
{% endif %}

  task decide;
{% include "systemverilog/weighing.sv" %}
  endtask

  // Whether FORCE_UNRESOLVED_EVERY falls on a decision
  function automatic bit is_forced(input logic [63:0] number);
    if (FORCE_UNRESOLVED_EVERY > 0) return number % {32'd0, FORCE_UNRESOLVED_EVERY} == 64'd0;
    else return 1'b0;
  endfunction
{% if noise %}

  task add_noise;
{% if noise.sigma_v %}
    if (!sigma_known) begin
      sigma_v = {{ noise.sigma_v }};
      noise_reach_v = noise_on != 0 ? CERTAIN_SIGMAS * sigma_v : 0.0;
      sigma_known = 1'b1;
    end
    if (magnitude_v < noise_reach_v) begin
      overdrive_v = overdrive_v + sigma_v * standard_normal(random_bits(noise_key, decision_count));
      magnitude_v = overdrive_v < 0.0 ? -overdrive_v : overdrive_v;
    end
{% else %}
    overdrive_v = overdrive_v + sigma_v * standard_normal(random_bits(noise_key, decision_count));
    magnitude_v = overdrive_v < 0.0 ? -overdrive_v : overdrive_v;
{% endif %}
  endtask
{% endif %}
