
  // -- To be read from outside ------------------------------------------------------------------

  // Why the outputs show no decision: 0 they do, or rest; 1 unresolved; 2 supply or enable;
  // 3 input not a number; 4 clock unknown; 5 before the first decision
  int x_cause = 5;
  logic [63:0] decision_count = 64'd0;  // decision edges so far
  real overdrive_v = 0.0;             // effective overdrive of the last decision, signed
  real delay_s = 1.0 / TICKS_PER_S;   // its delay, also if it did not resolve
{% if energy %}
  real energy_j = 0.0;                // of all decisions and resets so far
{% endif %}
  int temperature_warnings = 0;       // how often a condition was outside its range
  int supply_warnings = 0;
  int common_mode_warnings = 0;
  int input_warnings = 0;             // how often an input was not a number at a decision edge
  int clock_warnings = 0;             // how often the clock became unknown

  // -- State ------------------------------------------------------------------------------------

  // Since the last decision edge
  localparam bit [2:0] IDLE = 3'd0;      // nothing was decided
{% if aperture %}
  localparam bit [2:0] SAMPLING = 3'd1;  // the input is still to be sampled
{% endif %}
  localparam bit [2:0] DECIDING = 3'd2;  // a decision is on its way
  localparam bit [2:0] FORCED = 3'd3;    // one is kept from resolving
  localparam bit [2:0] DECIDED = 3'd4;   // one is shown
  bit [2:0] decision_state = IDLE;
  logic clk_level;                    // level of the clock before its last change
  // Waits are threads that nobody stops. Those that were called off are counted until they end;
  // while there are any, a wait that ends looks whether it is the one that is meant.
  int void_waits = 0;
  bit input_lost = 1'b0;              // an input was infinite or not a number at the decision edge
  real edge_time = 0.0;               // last decision edge; all times are in ticks
  real reset_time = 0.0;              // last end of a decision phase
{% if is_on %}
{% if supply_off and pins.vdd %}
  localparam real SUPPLY_OFF_V = {{ supply_off }};
{% endif %}
  bit is_on;                            // supplied and enabled
{% endif %}
{% if not holds %}
  bit returning = 1'b0;               // the reset state is on its way
  real return_ticks = 1.0;            // how long it takes
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
{% if noise.sigma_v %}
  localparam real WIDEST_REACH_V = {{ noise.widest_v }};  // under any conditions
  bit sigma_known = 1'b0;
{% endif %}
{% endif %}
{% if memory %}
  real shift_ticks = -1.0;            // length of reset for which the shift is known; none yet
{% if memory.terms %}
  real rest_ticks = -1.0;             // and for which parts of it may be known
{% endif %}
  real shift_v = 0.0;                 // in favour of the previous decision
  real memory_v = 0.0;                // what that adds to the trip point
{% for name in memory.names %}
  real {{ name }} = 0.0;
{% endfor %}
{% for term in memory.terms %}
  real {{ term.left_v }} = 0.0;
  bit {{ term.known }} = 1'b0;
{% endfor %}
{% endif %}
{% if aperture %}
  real aperture_ticks = 0.0;          // from the decision edge to its centre
{% endif %}
  real delay_ticks = 1.0;             // from the decision edge to the outputs
{% if delay == "logarithm" %}
  real tau_s = 0.0;                   // regeneration time constant
  real node_s = 0.0;                  // delay at the largest characterised overdrive
{% endif %}
{% if delay == "curve" %}
  localparam int LAST = {{ nodes[-1].number }};      // node
  // Segment k ends at node k: delay = cubic_0 + x (cubic_1 + x (cubic_2 + x cubic_3))
  real cubic_0[1:LAST], cubic_1[1:LAST], cubic_2[1:LAST], cubic_3[1:LAST];
  localparam int TAIL = 0;          // the line before the first node counts as a segment
  bit [LAST:0] segment_known = '0;
  real first_s = 0.0;           // delay at the first node
  real tau_s = 0.0;             // regeneration time constant
  real x_ln = 0.0;              // ln of an overdrive over that at the start of its segment
{% endif %}
{% if reset %}
  real reset_ticks = 0.0;             // reset delay
{% endif %}
{% if energy %}
{% for name in energy.variables %}
  real {{ name }} = 0.0;
{% endfor %}
{% if energy_over_overdrive %}
  localparam real LOW_V = {{ energy.low_v }}, HIGH_V = {{ energy.high_v }};  // overdrives in the table
{% endif %}
{% endif %}
{% for line in declarations %}
  {{ line }}
{% endfor %}
