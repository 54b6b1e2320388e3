// latch_minimal: invented example with a delay only
//
// Behavioural model of a clocked comparator for event-driven simulation with real numbers. It
// decides on the rising edge of clk. It states its own time unit; IEEE 1800-2017, 3.14.2, then
// wants one for every other module of a design too.
//
// The same core as in the file with real ports, behind pins of the nettype node_t: each of its
// drivers gives a voltage and a conductance, and the net settles where their currents cancel. The
// pins themselves load nothing. What can be read inside is in the instance core.
//
// Valid for:
//   supply not characterised: has no influence
//   temperature not characterised: has no influence
//   common mode not characterised: has no influence
//   overdrive 1 uV to 500 mV
//   process nominal (code 0)
//
// Models:
//   delay over overdrive: logarithmic, measured from clk 50 % to outp-outn at half supply
//
// Does not model:
//   offset, mismatch, noise, reset delay, memory of earlier decisions, aperture, energy, kickback
//
// Caution:
//   Fitted to tables and valid inside the stated ranges; outside, conditions are clamped and
//     results are no predictions.
//   It replaces neither transistor-level, extracted, timing or reliability sign-off nor your own
//     safety process, and claims no integrity level.
//   Rates far below what was counted rest on a Gaussian and an exponential law. Intervals leave out
//     the process kit's accuracy, parasitics, ageing, supply noise and jitter; mismatch has no
//     spatial correlation.
//   What an unresolved output shows is a convention; coin and hold can hide a synchroniser fault.
//     Random numbers reproduce a simulation and are not for security.
//   The file reveals performance that derives from a process kit: check its licence before passing
//     it on.
//
// Use:
//   Written by behavgen 0.1.0. This file belongs to you: use, change and pass it on without
//     condition.

// A node to which any number of sources is joined. The same in the files of all cells, and taken
// once where they are compiled together.
`ifndef BEHAVGEN_NODE
`define BEHAVGEN_NODE
package behavgen_node;  // verilog_lint: waive package-filename
  timeunit 1ns;
  timeprecision 1fs;

  // What drives a node, or what all that drive it amount to: volts behind a conductance. Without
  // a resistance to speak of, 1e12 siemens will do; with 0 a source has no say.
  typedef struct {
    real volts;
    real siemens;
  } source_t;

  // The voltage at which all currents into the node cancel (Kirchhoff's law)
  function automatic source_t joined(input source_t sources[]);
    source_t node;
    real amperes;
    amperes = 0.0;
    node.siemens = 0.0;
    foreach (sources[k]) begin
      amperes = amperes + sources[k].volts * sources[k].siemens;
      node.siemens = node.siemens + sources[k].siemens;
    end
    node.volts = node.siemens > 0.0 ? amperes / node.siemens : 0.0;
    return node;
  endfunction

  nettype source_t node_t with joined;
endpackage
`endif

// Waivers. Parameters: those of effects that are not characterised are there all the same, so that
// every cell has the same. Signals: some are there to be read from outside, and some algorithms
// use a part of a word. Delays: some resets take none. Nets: the supply both switches the cell and
// is an operand. First values: there is no pin that could give them. Names: constants are written
// like parameters. Lifetimes: that of a module, which is static; nothing is kept in a task.
// verilator lint_save
// verilator lint_off UNUSEDPARAM
// verilator lint_off UNUSEDSIGNAL
// verilator lint_off ZERODLY
// verilator lint_off SYNCASYNCNET
// verilator lint_off PROCASSINIT
// verilog_lint: waive-start parameter-name-style
// verilog_lint: waive-start explicit-task-lifetime
// verilog_lint: waive-start explicit-function-lifetime
`ifdef __slang__
`pragma diagnostic push
`pragma diagnostic ignore="-Wunused"
`endif

module latch_minimal_nettype_core #(
  parameter real       OFFSET_SHIFT_V         = 0.0,    // V, added to the trip point
  parameter int        NOISE_ON               = 1,      // does nothing: not characterised
  parameter int        MISMATCH_ON            = 0,      // does nothing: not characterised
  parameter int        MEMORY_ON              = 1,      // does nothing: not characterised
  parameter int        DELAY_ON               = 1,      // delays; off: one time step: 0 off, 1 on
  parameter bit [63:0] SEED                   = 64'd0,  // of this instance's random numbers; 0:
                                                        // from its hierarchical path
  parameter real       TEMPERATURE_C          = 27.0,   // does nothing: not characterised
  parameter int        PROCESS                = 0,      // process: 0 nominal
  parameter int        UNRESOLVED_MODE        = 0,      // outputs after an unresolved decision: 0
                                                        // x, 1 coin, 2 hold
  parameter int        FORCE_UNRESOLVED_EVERY = 0,      // one in so many decisions stays
                                                        // unresolved; 0: none is forced
  parameter int        WARNINGS               = 1       // messages: 0 silent, 1 once a cause, 2
                                                        // fatal
) (
  input  real  inp,         // V, taken at the decision edge
  input  real  inn,         // V
  input  logic clk,         // decides on its rising edge
  output logic outp,        // the decision; 1 in reset
  output logic outn,        // its complement; 1 in reset
  input  real  vdd,         // V
  output logic unresolved   // 1 from the end of an unresolved decision to the next ready
);
  timeunit 1fs;
  timeprecision 1fs;
  localparam real TICKS_PER_S = 1e15;  // times are whole numbers of ticks
  localparam real ROUND = 6755399441055744.0;  // 1.5 * 2^52: a sum with it is a whole number

  // -- To be read from outside ------------------------------------------------------------------

  // Why the outputs show no decision: 0 they do, or rest; 1 unresolved; 2 supply or enable;
  // 3 input not a number; 4 clock unknown; 5 before the first decision
  int x_cause = 5;
  logic [63:0] decision_count = 64'd0;  // decision edges so far
  real overdrive_v = 0.0;             // effective overdrive of the last decision, signed
  real delay_s = 1.0 / TICKS_PER_S;   // its delay, also if it did not resolve
  int temperature_warnings = 0;       // how often a condition was outside its range
  int supply_warnings = 0;
  int common_mode_warnings = 0;
  int input_warnings = 0;             // how often an input was not a number at a decision edge
  int clock_warnings = 0;             // how often the clock became unknown

  // -- State ------------------------------------------------------------------------------------

  // Since the last decision edge
  localparam bit [2:0] IDLE = 3'd0;      // nothing was decided
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
  bit is_on;                            // supplied and enabled
  bit returning = 1'b0;               // the reset state is on its way
  real return_ticks = 1.0;            // how long it takes

  // -- Conditions and what follows from them ----------------------------------------------------

  real delay_ticks = 1.0;             // from the decision edge to the outputs
  real tau_s = 0.0;                   // regeneration time constant
  real node_s = 0.0;                  // delay at the largest characterised overdrive

  // -- Start: what stays for the whole simulation -----------------------------------------------

  string instance_path;
  int process_code;
  logic [63:0] coin_key;

  initial begin
    $sformat(instance_path, "%m");
    take_settings;
    take_keys;
    select_process;
    take_constants;
    clk_level = clk;
    is_on = vdd - vdd == 0.0;
    if (clk_level === 1'b0 && is_on) power_up;
  end

  // The command line speaks to all instances and wins over their parameters
  task take_settings;
    if (!$value$plusargs("behavgen_process=%d", process_code)) process_code = PROCESS;
  endtask

  // One stream of random numbers for each purpose
  task take_keys;
    logic [63:0] seed, run_seed;
    seed = SEED == 64'd0 ? path_seed(instance_path) : SEED;
    if (!$value$plusargs("behavgen_seed=%d", run_seed)) run_seed = 64'd0;
    coin_key = stream_key(seed, run_seed, 64'd2);
  endtask

  task select_process;
    case (process_code)
      0: ;  // nominal
      default: begin
        $fatal(1, "[behavgen] %s t=0: the process code %0d is unknown; known are %s",
               instance_path, process_code,
               "0 nominal");
      end
    endcase
  endtask

  // -- Clock: only a clean step from one level to the other counts ------------------------------

  always @(clk) begin
    case ({clk_level, clk})
      2'b01: begin
        decision_count = decision_count + 64'd1;
        if (is_on) begin
          edge_time = $realtime;
          if (returning) begin
            call_off_return;
            if (is_due(reset_time + return_ticks)) take_reset_state;
          end
          input_lost = (inp - inp) + (inn - inn) != 0.0;
          if (input_lost) lose_input;
          if (!input_lost) begin
            decide;
            fork : show_when_ready
              begin
                #(delay_ticks);
                if (void_waits == 0) show_decision;
                else if (is_meant(DECIDING, edge_time + delay_ticks)) show_decision;
                else void_waits = void_waits - 1;
              end
            join_none
          end
        end
      end
      2'b10: begin
        if (is_on) begin
          reset_time = $realtime;
          return_ticks = 0.0;
          if (decision_state != DECIDED) end_undecided;
          returning = 1'b1;
          fork : return_when_due
            begin
              #(return_ticks);
              if (void_waits == 0) begin  // take_reset_state, without the cost of its call
                returning = 1'b0;
                outp = 1'b1;
                outn = 1'b1;
                x_cause = 0;
              end else if (returning && is_due(reset_time + return_ticks)) take_reset_state;
              else void_waits = void_waits - 1;
            end
          join_none
        end
      end
      default: begin
        if (is_on && clk !== clk_level) unclean_step;  // else it came back at once
      end
    endcase
    clk_level = clk;
  end

  // To a level that is neither 0 nor 1, or from there
  task unclean_step;
    if (clk !== 1'b0 && clk !== 1'b1) begin
      lose_outputs(4);
      if (decision_count != 64'd0) begin
        clock_warnings = clock_warnings + 1;
        if (clock_warnings == 1) warn("the clock is unknown");
      end
    end
    if (clk === 1'b0) power_up;
  endtask

  // -- Decision ---------------------------------------------------------------------------------

  // One of the inputs is infinite or not a number
  task lose_input;
    lose_outputs(3);
    input_warnings = input_warnings + 1;
    if (input_warnings == 1) begin
      warn($sformatf("the input is not a number: %g V and %g V", inp, inn));
    end
  endtask

  // Whether a wait that ends is the one that is meant; to half a tick, since the clock may step
  // between ticks
  function automatic bit is_meant(input bit [2:0] state, input real moment);
    return decision_state == state && is_due(moment);
  endfunction

  function automatic bit is_due(input real moment);
    return moment < $realtime + 0.5;
  endfunction

  localparam real FLOOR_V = 1e-15;  // overdrives below are not distinguished
  real magnitude_v = 0.0;           // of the overdrive

  task decide;
    overdrive_v = (inp - inn) - OFFSET_SHIFT_V;
    magnitude_v = overdrive_v < 0.0 ? -overdrive_v : overdrive_v;
    if (DELAY_ON != 0) begin
      delay_s = node_s;
      if (magnitude_v < FLOOR_V) delay_s = node_s + tau_s * $ln(0.5 / FLOOR_V);
      else if (magnitude_v < 0.5) delay_s = node_s + tau_s * $ln(0.5 / magnitude_v);
      delay_ticks = (delay_s * TICKS_PER_S + ROUND) - ROUND;
      if (delay_ticks < 1.0) delay_ticks = 1.0;
    end
    decision_state = DECIDING;
    if (FORCE_UNRESOLVED_EVERY > 0 ? is_forced(decision_count) : 1'b0) begin
      decision_state = FORCED;
      void_waits = void_waits + 1;
    end
  endtask

  // Whether FORCE_UNRESOLVED_EVERY falls on a decision
  function automatic bit is_forced(input logic [63:0] number);
    if (FORCE_UNRESOLVED_EVERY > 0) return number % {32'd0, FORCE_UNRESOLVED_EVERY} == 64'd0;
    else return 1'b0;
  endfunction

  // -- Outputs ----------------------------------------------------------------------------------

  task show_decision;
    decision_state = DECIDED;
    if (overdrive_v > 0.0) begin
      outp = 1'b1;
      outn = 1'b0;
    end else begin
      outp = 1'b0;
      outn = 1'b1;
    end
    unresolved = 1'b0;
    x_cause = 0;
  endtask

  // At the end of a decision phase
  task end_undecided;
    if (decision_state == DECIDING && (DELAY_ON == 0 || is_due(edge_time + delay_ticks))) begin
      void_waits = void_waits + 1;
      show_decision;  // at this very moment
    end else if (decision_state != IDLE) begin
      leave_unresolved;
      if (return_ticks < 1.0) return_ticks = 1.0;
    end else begin
      return_ticks = 1.0;  // as at power-up: there was nothing to decide
    end
  endtask

  task leave_unresolved;
    call_off_decision;
    unresolved = 1'b1;
    x_cause = 1;
    if (UNRESOLVED_MODE == 0) begin
      outp = 1'bx;
      outn = 1'bx;
    end else if (UNRESOLVED_MODE == 1) begin
      outp = random_bits(coin_key, decision_count) >> 63 != 64'd0;
      outn = !outp;
    end
  endtask

  // The outputs are unknown at once, whatever was on its way
  task lose_outputs(input int cause);
    call_off_decision;
    call_off_return;
    outp = 1'bx;
    outn = 1'bx;
    x_cause = cause;
  endtask

  task call_off_decision;
    if (decision_state == DECIDING) void_waits = void_waits + 1;
    decision_state = IDLE;
  endtask

  // -- Reset ------------------------------------------------------------------------------------

  // With the supply on and the clock at its reset level, but no decision before
  task power_up;
    reset_time = $realtime;
    return_ticks = 1.0;
    returning = 1'b1;
    fork : return_after_power_up
      begin
        #(return_ticks);
        if (void_waits == 0) take_reset_state;
        else if (returning && is_due(reset_time + return_ticks)) take_reset_state;
        else void_waits = void_waits - 1;
      end
    join_none
  endtask

  task take_reset_state;
    returning = 1'b0;
    outp = 1'b1;
    outn = 1'b1;
    x_cause = 0;
  endtask

  task call_off_return;
    if (returning) void_waits = void_waits + 1;
    returning = 1'b0;
  endtask

  // -- Supply and enable ------------------------------------------------------------------------

  always @(vdd) begin
    if (is_on != (vdd - vdd == 0.0)) begin
      is_on = !is_on;
      if (!is_on) lose_outputs(2);
      else if (clk_level === 1'b0) power_up;
    end
  end

  // -- Quantities under the conditions ----------------------------------------------------------

  task take_constants;
    // Delay: ln of the time constant and of the delay at the node, both in s
    tau_s = 1.0000000229345028e-11;
    node_s = 2.5000007276509775e-11;
  endtask

  // -- Random numbers ---------------------------------------------------------------------------
  // A counter through the mixing function SplitMix64 (Steele, Lea, Flood, OOPSLA 2014): no draw
  // needs those before it. Only + - * / and square root, so that all simulators draw the same.

  localparam logic [63:0] GOLDEN = 64'h9e37_79b9_7f4a_7c15;

  // FNV-1a (IETF RFC 9923) over the hierarchical path, so that no two instances draw alike
  function automatic logic [63:0] path_seed(input string path);
    logic [63:0] hash;
    hash = 64'hcbf2_9ce4_8422_2325;
    for (int i = 0; i < path.len(); i = i + 1) begin
      hash = (hash ^ {56'd0, path[i]}) * 64'h0000_0100_0000_01b3;
    end
    return hash;
  endfunction

  function automatic logic [63:0] stream_key(
      input logic [63:0] seed, input logic [63:0] run_seed, input logic [63:0] channel);
    logic [63:0] key;
    key = mix(seed + GOLDEN);
    key = mix((key ^ run_seed) + GOLDEN);
    return mix((key ^ channel) + GOLDEN);
  endfunction

  // Draw number n has the count n + 1
  function automatic logic [63:0] random_bits(input logic [63:0] key, input logic [63:0] count);
    return mix(key + count * GOLDEN);
  endfunction

  function automatic logic [63:0] mix(input logic [63:0] word);
    logic [63:0] mixed;
    mixed = (word ^ (word >> 30)) * 64'hbf58_476d_1ce4_e5b9;
    mixed = (mixed ^ (mixed >> 27)) * 64'h94d0_49bb_1331_11eb;
    return mixed ^ (mixed >> 31);
  endfunction

  // -- Messages ---------------------------------------------------------------------------------

  task warn(input string what);
    string message;
    message = $sformatf("[behavgen] %s t=%0.6f ns decision %0d: %s", instance_path,
                        $realtime * 1e-6,
                        decision_count == 64'd0 ? 64'd0 : decision_count - 64'd1, what);
    if (WARNINGS == 2) $fatal(1, "%s", message);
    else if (WARNINGS != 0) $display("%s", message);
  endtask
endmodule

`ifdef __slang__
`pragma diagnostic pop
`endif
// verilator lint_restore
// verilog_lint: waive-stop parameter-name-style
// verilog_lint: waive-stop explicit-task-lifetime
// verilog_lint: waive-stop explicit-function-lifetime

module latch_minimal_nettype
  import behavgen_node::*;
#(
  parameter real       OFFSET_SHIFT_V         = 0.0,    // V, added to the trip point
  parameter int        NOISE_ON               = 1,      // does nothing: not characterised
  parameter int        MISMATCH_ON            = 0,      // does nothing: not characterised
  parameter int        MEMORY_ON              = 1,      // does nothing: not characterised
  parameter int        DELAY_ON               = 1,      // delays; off: one time step: 0 off, 1 on
  parameter bit [63:0] SEED                   = 64'd0,  // of this instance's random numbers; 0:
                                                        // from its hierarchical path
  parameter real       TEMPERATURE_C          = 27.0,   // does nothing: not characterised
  parameter int        PROCESS                = 0,      // process: 0 nominal
  parameter int        UNRESOLVED_MODE        = 0,      // outputs after an unresolved decision: 0
                                                        // x, 1 coin, 2 hold
  parameter int        FORCE_UNRESOLVED_EVERY = 0,      // one in so many decisions stays
                                                        // unresolved; 0: none is forced
  parameter int        WARNINGS               = 1       // messages: 0 silent, 1 once a cause, 2
                                                        // fatal
) (
  input  node_t inp,         // V, taken at the decision edge
  input  node_t inn,         // V
  input  logic  clk,         // decides on its rising edge
  output logic  outp,        // the decision; 1 in reset
  output logic  outn,        // its complement; 1 in reset
  input  node_t vdd,         // V
  output logic  unresolved   // 1 from the end of an unresolved decision to the next ready
);
  timeunit 1fs;
  timeprecision 1fs;

  latch_minimal_nettype_core #(
    .OFFSET_SHIFT_V(OFFSET_SHIFT_V),
    .NOISE_ON(NOISE_ON),
    .MISMATCH_ON(MISMATCH_ON),
    .MEMORY_ON(MEMORY_ON),
    .DELAY_ON(DELAY_ON),
    .SEED(SEED),
    .TEMPERATURE_C(TEMPERATURE_C),
    .PROCESS(PROCESS),
    .UNRESOLVED_MODE(UNRESOLVED_MODE),
    .FORCE_UNRESOLVED_EVERY(FORCE_UNRESOLVED_EVERY),
    .WARNINGS(WARNINGS)
  ) core (
    .inp(inp.volts),
    .inn(inn.volts),
    .vdd(vdd.volts),
    .clk(clk),
    .outp(outp),
    .outn(outn),
    .unresolved(unresolved)
  );
endmodule
