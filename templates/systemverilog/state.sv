
  // -- To be read from outside ------------------------------------------------------------------

  // Why the outputs show no decision: 0 they do, or rest; 1 unresolved; 2 supply or enable;
  // 3 input not a number; 4 clock unknown; 5 before the first decision
  int x_cause = 5;
  bit [63:0] decision_count = 64'd0;  // decision edges so far
  real overdrive_v = 0.0;             // effective overdrive of the last decision, signed
  real delay_s = TICK_S;              // its delay, also if it did not resolve
  int temperature_warnings = 0;       // how often a condition was outside its range
  int supply_warnings = 0;
  int common_mode_warnings = 0;
  int input_warnings = 0;             // how often an input was not a number at a decision edge
  int clock_warnings = 0;             // how often the clock became unknown

  // -- State ------------------------------------------------------------------------------------

  // Since the last decision edge: nothing was decided; a decision is on its way; one is kept
  // from resolving; one is shown
  localparam bit [1:0] IDLE = 2'd0, DECIDING = 2'd1, FORCED = 2'd2, DECIDED = 2'd3;
  bit [1:0] decision_state = IDLE;
  real edge_time = 0.0;               // decision edge, in ticks
  logic clk_level;                    // level of the clock before its last change
{% if is_on %}
{% if supply_off and pins.vdd %}
  localparam real SUPPLY_OFF_V = {{ supply_off }};
{% endif %}
  bit is_on;                          // supplied and enabled
{% endif %}
{% if not holds %}
  bit returning = 1'b0;               // the reset state is on its way
  real return_ticks = 1.0;            // how long it takes, rounded where it is waited for
  real return_time = 0.0;             // when it is there, in ticks
{% endif %}

  // -- Conditions and what follows from them ----------------------------------------------------

{% if temperature.matters %}
  localparam real STEPS_PER_K = 1024.0;     // to which the temperature is rounded
  real temperature_k = 0.0;
{% endif %}
{% if supply.matters or common_mode.matters %}
  localparam real STEPS_PER_V = 1048576.0;  // to which supply and common mode are rounded
{% endif %}
{% if supply.matters %}
{% if not fixed_supply %}
  bit vdd_changed = 1'b1;             // since it was last taken in
{% endif %}
  real vdd_v = 0.0;
{% endif %}
{% if common_mode.matters %}
  real vcm_steps = 0.0;               // common mode in steps, plus half a step to round it down
  real vcm_step = 0.0;                // range of vcm_steps that was last taken in; none yet
  real vcm_step_end = 0.0;
  real vcm_v = 0.0;
{% endif %}
{% if offset %}
  real trip_v = 0.0;                  // trip point with OFFSET_SHIFT_V
{% endif %}
{% if mismatch %}
  real mismatch_v = 0.0;              // offset of this instance beyond it
{% endif %}
{% if noise %}
  localparam real CERTAIN_SIGMAS = 8.3;     // no draw reaches it, so that none is made beyond
  real sigma_v = 0.0;                 // noise of one decision
  real noise_reach_v = 0.0;           // overdrives from which noise changes no bit
{% if sigma_on_demand %}
  bit sigma_known = 1'b0;             // if not, the reach is only an upper bound
{% endif %}
{% endif %}
{% if delay == "logarithm" %}
  real tau_s = 0.0;                   // regeneration time constant
  real node_s = 0.0;                  // delay at the largest characterised overdrive
{% endif %}
{% if reset %}
  real reset_ticks = 0.0;             // reset delay
{% endif %}
{% for line in declarations %}
  {{ line }}
{% endfor %}
