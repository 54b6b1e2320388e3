
  // -- To be read from outside ------------------------------------------------------------------

  // Why the outputs show no decision: 0 they do or rest, 1 unresolved, 2 supply or enable,
  // 3 input not a number, 4 clock unknown, 5 before the first decision
  int x_cause = 5;
  bit [63:0] decision_count = 64'd0;  // decision edges so far
  real overdrive_v = 0.0;             // of the last decision, signed, with its noise
  real delay_s = 0.0;                 // of the last decision, also if it did not resolve
  int range_warnings = 0;             // conditions outside the characterised range
  int input_warnings = 0;             // inputs that are not a number
  int clock_warnings = 0;             // unknown clock levels

  // -- State ------------------------------------------------------------------------------------

  localparam real TICKS_PER_S = {{ ticks_per_s }};

  // Of the present clock phase: without a decision, with one on its way, with one that is kept
  // from resolving, with one that is shown
  localparam int IDLE = 0, DECIDING = 1, FORCED = 2, DECIDED = 3;
  int phase = IDLE;
  logic clk_level = 1'bx;  // last clock level; x if it was neither 0 nor 1
{% if can_be_off %}
  bit on = 1'b0;           // supplied and enabled
{% endif %}
  bit leaning;             // what the decision will be
  longint delay_ticks;     // its delay
  real edge_time;          // its edge, in ticks
{% if not holds %}
  bit returning = 1'b0;    // the reset state is on its way
  longint return_ticks;    // how long it takes
  real return_time;        // when it is there
{% endif %}
