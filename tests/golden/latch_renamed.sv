// latch_renamed: invented example with every effect
//
// Behavioural model of a clocked comparator for event-driven simulation with real numbers. It
// decides on the rising edge of ck. It states its own time unit; IEEE 1800-2017, 3.14.2, then wants
// one for every other module of a design too.
//
// Valid for:
//   supply 1.08 V to 1.32 V
//   temperature -40 degC to 125 degC
//   common mode 500 mV to 800 mV
//   overdrive 1 uV to 300 mV
//   process typ (code 0)
//   process slow (code 3): scaled from typ, supply 1.2 V, temperature 27 degC, common mode 600 mV
//     to 700 mV
//
// Models:
//   offset: trip points of the S-curves
//   mismatch between instances: 60 measured
//   noise: Gaussian, no draws beyond 8.3 sigma where they cannot change a bit
//   delay over overdrive: nodes, measured from clk 50 % to outp-outn at half supply
//   reset delay
//
// Does not model:
//   memory of earlier decisions, aperture, energy, kickback
//
// Values at the middle of the range:
//   tau_s 20 ps (19.8 ps to 20.3 ps at 95 %): regeneration time constant
//
// Made from:
//   delay: delay.csv, 3 rows, sha256 000000000000
//   noise: noise.csv, 4 rows, sha256 111111111111
//
// Fits the tables:
//   delay: 3 rows, 1 condition; rms up to 0.4 %, worst up to 0.9 %
//
// Note:
//   The noise table covers 1 of 1 conditions.
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

module latch_renamed #(
  parameter real       OFFSET_SHIFT_V         = 0.0,    // V, added to the trip point
  parameter int        NOISE_ON               = 1,      // noise of each decision: 0 off, 1 on
  parameter int        MISMATCH_ON            = 0,      // offset of this instance: 0 off, 1 on
  parameter int        MEMORY_ON              = 1,      // does nothing: not characterised
  parameter int        DELAY_ON               = 1,      // delays; off: one time step: 0 off, 1 on
  parameter bit [63:0] SEED                   = 64'd0,  // of this instance's random numbers; 0:
                                                        // from its hierarchical path
  parameter real       TEMPERATURE_C          = 27.0,   // degC, temperature of the cell
  parameter int        PROCESS                = 0,      // process: 0 typ, 3 slow
  parameter int        UNRESOLVED_MODE        = 0,      // outputs after an unresolved decision: 0
                                                        // x, 1 coin, 2 hold
  parameter int        FORCE_UNRESOLVED_EVERY = 0,      // one in so many decisions stays
                                                        // unresolved; 0: none is forced
  parameter int        WARNINGS               = 1       // messages: 0 silent, 1 once a cause, 2
                                                        // fatal
) (
  input  real  vip,         // V, taken at the decision edge
  input  real  vim,         // V
  input  logic ck,          // decides on its rising edge
  output logic q,           // the decision; 1 in reset
  output logic unresolved,  // 1 from the end of an unresolved decision to the next ready
  input  logic en           // off unless it is 1
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

  localparam real STEPS_PER_K = 1024.0;     // to which the temperature is rounded
  real temperature_k = 0.0;
  localparam real STEPS_PER_V = 1048576.0;  // to which supply and common mode are rounded
  real vdd_v = 0.0;
  real vcm_steps = 0.0;               // common mode in steps, plus half a step to round it down
  real vcm_step = 0.0;                // range of vcm_steps that was last taken in; none yet
  real vcm_step_end = 0.0;
  real vcm_v = 0.0;
  real trip_v = 0.0;                  // trip point with OFFSET_SHIFT_V
  real mismatch_v = 0.0;              // offset of this instance beyond it
  localparam real CERTAIN_SIGMAS = 8.3;     // no draw reaches it, so that none is made beyond
  real sigma_v = 0.0;                 // noise of one decision
  real noise_reach_v = 0.0;           // overdrives from which noise changes no bit
  localparam real WIDEST_REACH_V = 0.006134;  // under any conditions
  bit sigma_known = 1'b0;
  real delay_ticks = 1.0;             // from the decision edge to the outputs
  localparam int LAST = 3;      // node
  // Segment k ends at node k: delay = cubic_0 + x (cubic_1 + x (cubic_2 + x cubic_3))
  real cubic_0[1:LAST], cubic_1[1:LAST], cubic_2[1:LAST], cubic_3[1:LAST];
  localparam int TAIL = 0;          // the line before the first node counts as a segment
  bit [LAST:0] segment_known = '0;
  real first_s = 0.0;           // delay at the first node
  real tau_s = 0.0;             // regeneration time constant
  real x_ln = 0.0;              // ln of an overdrive over that at the start of its segment
  real reset_ticks = 0.0;             // reset delay
  real x_t, x_v, x_c, x_t_low, x_t_high, x_v_low, x_v_high, x_c_low, x_c_high;
  real offset_t0v0c0, offset_v0c0, offset_v1c0, offset_c0, offset_c1;
  real noise_t0v0c0, noise_v0c0, noise_c0;
  real tau_t0v0c0, tau_v0c0, tau_v1c0, tau_c0, tau_c1;
  real node0_t0v0c0, node0_v0c0, node0_v1c0, node0_c0, node0_c1;
  real node1_t0v0c0, node1_v0c0, node1_v1c0, node1_c0, node1_c1;
  real node2_t0v0c0, node2_v0c0, node2_v1c0, node2_c0, node2_c1;
  real node3_t0v0c0, node3_v0c0, node3_v1c0, node3_c0, node3_c1;
  real reset_t0v0c0, reset_v0c0, reset_c0;
  real mismatch0_v0c0, mismatch0_c0, mismatch0_v;

  // -- Start: what stays for the whole simulation -----------------------------------------------

  string instance_path;
  int process_code;
  real temperature_c;
  int noise_on;
  logic [63:0] noise_key;
  int mismatch_on;
  logic [63:0] mismatch_key;
  real mismatch0_z, mismatch1_z;  // this instance, in sigmas
  logic [63:0] coin_key;

  initial begin
    $sformat(instance_path, "%m");
    take_settings;
    take_keys;
    select_process;
    fold_temperature;
    fold_supply;
    clk_level = ck;
    is_on = en === 1'b1;
    if (clk_level === 1'b0 && is_on) power_up;
  end

  // The command line speaks to all instances and wins over their parameters
  task take_settings;
    if (!$value$plusargs("behavgen_noise=%d", noise_on)) noise_on = NOISE_ON;
    if (!$value$plusargs("behavgen_mismatch=%d", mismatch_on)) mismatch_on = MISMATCH_ON;
    if (!$value$plusargs("behavgen_temp_c=%f", temperature_c)) temperature_c = TEMPERATURE_C;
    if (!$value$plusargs("behavgen_process=%d", process_code)) process_code = PROCESS;
  endtask

  // One stream of random numbers for each purpose
  task take_keys;
    logic [63:0] seed, run_seed;
    seed = SEED == 64'd0 ? path_seed(instance_path) : SEED;
    if (!$value$plusargs("behavgen_seed=%d", run_seed)) run_seed = 64'd0;
    noise_key = stream_key(seed, run_seed, 64'd0);
    mismatch_key = stream_key(seed, run_seed, 64'd1);
    mismatch0_z = standard_normal(random_bits(mismatch_key, 64'd1));
    mismatch1_z = standard_normal(random_bits(mismatch_key, 64'd2));
    coin_key = stream_key(seed, run_seed, 64'd2);
  endtask

  task select_process;
    case (process_code)
      0: begin  // typ
        x_t_low = 233.15; x_t_high = 398.15; x_v_low = 1.08; x_v_high = 1.32; x_c_low = 0.5;
        x_c_high = 0.8; offset_t0v0c0 = 0.001; noise_t0v0c0 = -7.6; tau_t0v0c0 = -24.635;
        node0_t0v0c0 = -22.10956; node1_t0v0c0 = -22.383997; node2_t0v0c0 = -22.763487;
        node3_t0v0c0 = -23.536677; reset_t0v0c0 = -24.41;
      end
      3: begin  // slow
        x_t_low = 300.15; x_t_high = 300.15; x_v_low = 1.2; x_v_high = 1.2; x_c_low = 0.6;
        x_c_high = 0.7; offset_t0v0c0 = 0.0014; noise_t0v0c0 = -7.55; tau_t0v0c0 = -24.515;
        node0_t0v0c0 = -21.95956; node1_t0v0c0 = -22.233997000000002;
        node2_t0v0c0 = -22.613487000000003; node3_t0v0c0 = -23.386677000000002;
        reset_t0v0c0 = -24.31;
      end
      default: begin
        $fatal(1, "[behavgen] %s t=0: the process code %0d is unknown; known are %s",
               instance_path, process_code,
               "0 typ, 3 slow");
      end
    endcase
  endtask

  // -- Clock: only a clean step from one level to the other counts ------------------------------

  always @(ck) begin
    case ({clk_level, ck})
      2'b01: begin
        decision_count = decision_count + 64'd1;
        if (is_on) begin
          edge_time = $realtime;
          if (returning) begin
            call_off_return;
            if (is_due(reset_time + return_ticks)) take_reset_state;
          end
          vcm_steps = (vip + vim) * (0.5 * STEPS_PER_V) + 0.5;
          if (vcm_steps < vcm_step) take_conditions;
          else if (!(vcm_steps < vcm_step_end)) take_conditions;  // or it is not a number
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
          return_ticks = reset_ticks;
          if (decision_state != DECIDED) end_undecided;
          returning = 1'b1;
          fork : return_when_due
            begin
              #(return_ticks);
              if (void_waits == 0) begin  // take_reset_state, without the cost of its call
                returning = 1'b0;
                q = 1'b1;
                x_cause = 0;
              end else if (returning && is_due(reset_time + return_ticks)) take_reset_state;
              else void_waits = void_waits - 1;
            end
          join_none
        end
      end
      default: begin
        if (is_on && ck !== clk_level) unclean_step;  // else it came back at once
      end
    endcase
    clk_level = ck;
  end

  // To a level that is neither 0 nor 1, or from there
  task unclean_step;
    if (ck !== 1'b0 && ck !== 1'b1) begin
      lose_outputs(4);
      if (decision_count != 64'd0) begin
        clock_warnings = clock_warnings + 1;
        if (clock_warnings == 1) warn("the clock is unknown");
      end
    end
    if (ck === 1'b0) power_up;
  endtask

  // -- Decision ---------------------------------------------------------------------------------

  task take_conditions;
    real clamped;
    input_lost = vcm_steps - vcm_steps != 0.0;
    if (input_lost) begin
      vcm_step_end = vcm_step;  // nothing is in this range
      lose_input;
    end else begin
      vcm_step = $floor(vcm_steps);
      vcm_step_end = vcm_step + 1.0;
      vcm_v = vcm_step / STEPS_PER_V;
      if (vcm_v < x_c_low - 1.0 / STEPS_PER_V ? 1'b1
          : vcm_v > x_c_high + 1.0 / STEPS_PER_V) begin
        common_mode_warnings = common_mode_warnings + 1;
        if (common_mode_warnings == 1) begin
          warn($sformatf("common mode %g V is outside %g V to %g V and clamped",
                         vcm_v, x_c_low, x_c_high));
        end
      end
      // Coordinates
      clamped = vcm_v > x_c_low ? (vcm_v < x_c_high ? vcm_v : x_c_high) : x_c_low;
      x_c = (1.0 / (clamped * clamped) - 2.78) / 1.22;
      // Offset: the trip point in V
      trip_v = ((-4e-5 * x_c + offset_c1) * x_c + offset_c0) + OFFSET_SHIFT_V;
      // Mismatch: components in V per sigma, and this instance's offset from the nominal
      if (mismatch_on != 0) begin
        mismatch0_v = 0.0003 * x_c + mismatch0_c0;
        mismatch_v = mismatch0_v * mismatch0_z + 0.0008 * mismatch1_z;
      end
      // Noise: ln of its sigma in V, found when a small overdrive needs it
      sigma_known = 1'b0;
      // Delay: the curve is to be evaluated anew
      segment_known = '0;
    end
  endtask

  // One of the inputs is infinite or not a number
  task lose_input;
    lose_outputs(3);
    input_warnings = input_warnings + 1;
    if (input_warnings == 1) begin
      warn($sformatf("the input is not a number: %g V and %g V", vip, vim));
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
    overdrive_v = ((vip - vim) - trip_v) - mismatch_v;
    magnitude_v = overdrive_v < 0.0 ? -overdrive_v : overdrive_v;
    if (magnitude_v < WIDEST_REACH_V) add_noise;
    if (DELAY_ON != 0) begin
      if (magnitude_v >= 0.3) begin
        delay_s = $exp((0.03 * x_c + node3_c1) * x_c + node3_c0);
      end else if (magnitude_v >= 0.03) begin
        if (!segment_known[3]) build_segment_3;
        x_ln = $ln(magnitude_v / 0.03);
        delay_s = cubic_0[3]
            + x_ln * (cubic_1[3] + x_ln * (cubic_2[3] + x_ln * cubic_3[3]));
      end else if (magnitude_v >= 0.005) begin
        if (!segment_known[2]) build_segment_2;
        x_ln = $ln(magnitude_v / 0.005);
        delay_s = cubic_0[2]
            + x_ln * (cubic_1[2] + x_ln * (cubic_2[2] + x_ln * cubic_3[2]));
      end else if (magnitude_v >= 0.001) begin
        if (!segment_known[1]) build_segment_1;
        x_ln = $ln(magnitude_v / 0.001);
        delay_s = cubic_0[1]
            + x_ln * (cubic_1[1] + x_ln * (cubic_2[1] + x_ln * cubic_3[1]));
      end else begin
        if (!segment_known[TAIL]) build_tail;
        x_ln = $ln((magnitude_v < FLOOR_V ? FLOOR_V : magnitude_v) / 0.001);
        delay_s = first_s - tau_s * x_ln;
      end
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

  task add_noise;
    if (!sigma_known) begin
      sigma_v = exact_exp((0.03 * x_c + 0.2) * x_c + noise_c0);
      noise_reach_v = noise_on != 0 ? CERTAIN_SIGMAS * sigma_v : 0.0;
      sigma_known = 1'b1;
    end
    if (magnitude_v < noise_reach_v) begin
      overdrive_v = overdrive_v + sigma_v * standard_normal(random_bits(noise_key, decision_count));
      magnitude_v = overdrive_v < 0.0 ? -overdrive_v : overdrive_v;
    end
  endtask

  // -- Delay over overdrive ---------------------------------------------------------------------
  // A curve over ln(overdrive) through nodes. Below the first node a straight line with slope
  // -tau, which is linear regeneration; between nodes cubics whose slopes at the nodes are those
  // of the parabola through three neighbours; from the last node on constant.
  // What an overdrive needs of it is built when it is first needed under the present conditions.

  task build_tail;
    first_s = $exp((0.03 * x_c + node0_c1) * x_c + node0_c0);
    tau_s = $exp((0.02 * x_c + tau_c1) * x_c + tau_c0);
    segment_known[TAIL] = 1'b1;
  endtask

  // Of one segment, in s: delays at its nodes, slopes of the chords from node to node, of the curve
  real begin_s, end_s, chord_before, chord, chord_after, slope_first, slope_last;

  task build_segment_1;  // 1 mV to 5 mV
    begin_s = $exp((0.03 * x_c + node0_c1) * x_c + node0_c0);
    end_s = $exp((0.03 * x_c + node1_c1) * x_c + node1_c0);
    chord = (end_s - begin_s) / 1.6094379124341003;
    chord_before = chord;
    chord_after = ($exp((0.03 * x_c + node2_c1) * x_c + node2_c0) - end_s) / 1.791759469228055;
    slope_first = -$exp((0.02 * x_c + tau_c1) * x_c + tau_c0);
    slope_last = 0.5268025545616607 * chord + 0.4731974454383393 * chord_after;
    keep_segment(1, 1.6094379124341003);
  endtask

  task build_segment_2;  // 5 mV to 30 mV
    begin_s = $exp((0.03 * x_c + node1_c1) * x_c + node1_c0);
    end_s = $exp((0.03 * x_c + node2_c1) * x_c + node2_c0);
    chord = (end_s - begin_s) / 1.791759469228055;
    chord_before = (begin_s - $exp((0.03 * x_c + node0_c1) * x_c + node0_c0)) / 1.6094379124341003;
    chord_after = ($exp((0.03 * x_c + node3_c1) * x_c + node3_c0) - end_s) / 2.302585092994046;
    slope_first = 0.5268025545616607 * chord_before + 0.4731974454383393 * chord;
    slope_last = 0.5623818557528476 * chord + 0.4376181442471524 * chord_after;
    keep_segment(2, 1.791759469228055);
  endtask

  task build_segment_3;  // 30 mV to 300 mV
    begin_s = $exp((0.03 * x_c + node2_c1) * x_c + node2_c0);
    end_s = $exp((0.03 * x_c + node3_c1) * x_c + node3_c0);
    chord = (end_s - begin_s) / 2.302585092994046;
    chord_before = (begin_s - $exp((0.03 * x_c + node1_c1) * x_c + node1_c0)) / 1.791759469228055;
    chord_after = chord;
    slope_first = 0.5623818557528476 * chord_before + 0.4376181442471524 * chord;
    slope_last = chord + 0.5623818557528476 * (chord - chord_before);
    keep_segment(3, 2.302585092994046);
  endtask

  // Width in ln(overdrive); slopes are limited, so that the curve falls wherever its nodes do
  task keep_segment(input int k, input real width);
    real bend;
    if (slope_first < 3.0 * chord_before) slope_first = 3.0 * chord_before;
    if (slope_first < 3.0 * chord) slope_first = 3.0 * chord;
    if (slope_first > 0.0) slope_first = 0.0;
    if (slope_last < 3.0 * chord_after) slope_last = 3.0 * chord_after;
    if (slope_last < 3.0 * chord) slope_last = 3.0 * chord;
    if (slope_last > 0.0) slope_last = 0.0;
    bend = (slope_first + slope_last - 2.0 * chord) / width;
    cubic_0[k] = begin_s;
    cubic_1[k] = slope_first;
    cubic_2[k] = (chord - slope_first) / width - bend;
    cubic_3[k] = bend / width;
    segment_known[k] = 1'b1;
  endtask

  // -- Outputs ----------------------------------------------------------------------------------

  task show_decision;
    decision_state = DECIDED;
    q = overdrive_v > 0.0;
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
      q = 1'bx;
    end else if (UNRESOLVED_MODE == 1) begin
      q = random_bits(coin_key, decision_count) >> 63 != 64'd0;
    end
  endtask

  // The outputs are unknown at once, whatever was on its way
  task lose_outputs(input int cause);
    call_off_decision;
    call_off_return;
    q = 1'bx;
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
    q = 1'b1;
    x_cause = 0;
  endtask

  task call_off_return;
    if (returning) void_waits = void_waits + 1;
    returning = 1'b0;
  endtask

  // -- Supply and enable ------------------------------------------------------------------------

  always @(en) begin
    if (is_on != (en === 1'b1)) begin
      is_on = !is_on;
      if (!is_on) lose_outputs(2);
      else if (clk_level === 1'b0) power_up;
    end
  end

  // -- Quantities under the conditions ----------------------------------------------------------
  // Every quantity is a polynomial in coordinates x of the conditions, which are clamped to where
  // it was characterised. t, v, c are temperature, supply and common mode, digits their powers.
  // Polynomials are folded one condition at a time, so that only what has changed is repeated.

  task fold_temperature;
    real clamped;
    temperature_k = $floor((temperature_c + 273.15) * STEPS_PER_K + 0.5) / STEPS_PER_K;
    if (temperature_k < x_t_low - 1.0 / STEPS_PER_K
        || temperature_k > x_t_high + 1.0 / STEPS_PER_K) begin
      temperature_warnings = temperature_warnings + 1;
      warn($sformatf("temperature %g degC is outside %g degC to %g degC and clamped",
                     temperature_c, x_t_low - 273.15, x_t_high - 273.15));
    end
    // Coordinates
    clamped = temperature_k > x_t_low ? (temperature_k < x_t_high ? temperature_k : x_t_high) :
        x_t_low;
    x_t = (1.0 / clamped - 0.0034) / 0.00089;
    // Offset: the trip point in V
    offset_v0c0 = 0.0001 * x_t + offset_t0v0c0;
    offset_v1c0 = 5e-5 * x_t - 0.0002;
    // Mismatch: components in V per sigma, and this instance's offset from the nominal
    if (mismatch_on != 0) begin
      mismatch0_v0c0 = 0.0002 * x_t + 0.006;
    end
    // Noise: ln of its sigma in V, found when a small overdrive needs it
    noise_v0c0 = 0.1 * x_t + noise_t0v0c0;
    // Delay: ln of the regeneration time constant in s
    tau_v0c0 = 0.04 * x_t + tau_t0v0c0;
    tau_v1c0 = 0.03 * x_t - 0.35;
    // Delay: ln of the delay at each node in s
    node0_v0c0 = 0.05 * x_t + node0_t0v0c0;
    node0_v1c0 = 0.02 * x_t - 0.3;
    node1_v0c0 = 0.05 * x_t + node1_t0v0c0;
    node1_v1c0 = 0.02 * x_t - 0.3;
    node2_v0c0 = 0.05 * x_t + node2_t0v0c0;
    node2_v1c0 = 0.02 * x_t - 0.3;
    node3_v0c0 = 0.05 * x_t + node3_t0v0c0;
    node3_v1c0 = 0.02 * x_t - 0.3;
    // Reset: ln of its delay in s
    reset_v0c0 = 0.05 * x_t + reset_t0v0c0;
  endtask

  task fold_supply;
    real clamped;
    vdd_v = 1.1999998092651367;  // the middle of its range, for lack of a pin
    // Coordinates
    clamped = vdd_v > x_v_low ? (vdd_v < x_v_high ? vdd_v : x_v_high) : x_v_low;
    x_v = (clamped - 1.2) / 0.12;
    // Offset: the trip point in V
    offset_c0 = offset_v1c0 * x_v + offset_v0c0;
    offset_c1 = 2e-5 * x_v * x_v + 0.0003;
    // Mismatch: components in V per sigma, and this instance's offset from the nominal
    if (mismatch_on != 0) begin
      mismatch0_c0 = -0.0001 * x_v + mismatch0_v0c0;
    end
    // Noise: ln of its sigma in V, found when a small overdrive needs it
    noise_c0 = -0.05 * x_v + noise_v0c0;
    // Delay: ln of the regeneration time constant in s
    tau_c0 = tau_v1c0 * x_v + tau_v0c0;
    tau_c1 = 0.01 * x_v * x_v + 0.1;
    // Delay: ln of the delay at each node in s
    node0_c0 = node0_v1c0 * x_v + node0_v0c0;
    node0_c1 = 0.01 * x_v * x_v + 0.1;
    node1_c0 = node1_v1c0 * x_v + node1_v0c0;
    node1_c1 = 0.01 * x_v * x_v + 0.1;
    node2_c0 = node2_v1c0 * x_v + node2_v0c0;
    node2_c1 = 0.01 * x_v * x_v + 0.1;
    node3_c0 = node3_v1c0 * x_v + node3_v0c0;
    node3_c1 = 0.01 * x_v * x_v + 0.1;
    // Reset: ln of its delay in s
    reset_c0 = -0.2 * x_v + reset_v0c0;
    reset_ticks = DELAY_ON != 0 ? $floor($exp(reset_c0) * TICKS_PER_S + 0.5) : 0.0;
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

  // Algorithm AS 241 (Wichura, Applied Statistics 37, 1988) on the upper 52 bits; below 8.3
  function automatic real standard_normal(input logic [63:0] bits);
    real centred, arg, value;
    centred = real'(bits[63:12]);
    centred = (centred + 0.5) * 2.220446049250313e-16 - 0.5;
    if (centred >= -0.425 && centred <= 0.425) begin
      arg = 0.180625 - centred * centred;
      return centred
          * (((((((2.5090809287301226727e3 * arg + 3.3430575583588128105e4) * arg
          + 6.7265770927008700853e4) * arg + 4.5921953931549871457e4) * arg
          + 1.3731693765509461125e4) * arg + 1.9715909503065514427e3) * arg
          + 1.3314166789178437745e2) * arg + 3.3871328727963666080)
          / (((((((5.2264952788528545610e3 * arg + 2.8729085735721942674e4) * arg
          + 3.9307895800092710610e4) * arg + 2.1213794301586595867e4) * arg
          + 5.3941960214247511077e3) * arg + 6.8718700749205790830e2) * arg
          + 4.2313330701600911252e1) * arg + 1.0);
    end
    arg = $sqrt(-exact_ln(centred < 0.0 ? 0.5 + centred : 0.5 - centred));
    if (arg <= 5.0) begin
      arg = arg - 1.6;
      value = (((((((7.74545014278341407640e-4 * arg + 2.27238449892691845833e-2) * arg
          + 2.41780725177450611770e-1) * arg + 1.27045825245236838258) * arg
          + 3.64784832476320460504) * arg + 5.76949722146069140550) * arg
          + 4.63033784615654529590) * arg + 1.42343711074968357734)
          / (((((((1.05075007164441684324e-9 * arg + 5.47593808499534494600e-4) * arg
          + 1.51986665636164571966e-2) * arg + 1.48103976427480074590e-1) * arg
          + 6.89767334985100004550e-1) * arg + 1.67638483018380384940) * arg
          + 2.05319162663775882187) * arg + 1.0);
    end else begin
      arg = arg - 5.0;
      value = (((((((2.01033439929228813265e-7 * arg + 2.71155556874348757815e-5) * arg
          + 1.24266094738807843860e-3) * arg + 2.65321895265761230930e-2) * arg
          + 2.96560571828504891230e-1) * arg + 1.78482653991729133580) * arg
          + 5.46378491116411436990) * arg + 6.65790464350110377720)
          / (((((((2.04426310338993978564e-15 * arg + 1.42151175831644588870e-7) * arg
          + 1.84631831751005468180e-5) * arg + 7.86869131145613259100e-4) * arg
          + 1.48753612908506148525e-2) * arg + 1.36929880922735805310e-1) * arg
          + 5.99832206555887937690e-1) * arg + 1.0);
    end
    return centred < 0.0 ? -value : value;
  endfunction

  // ln(m 2^e) = e ln 2 + 2 s (1 + s^2/3 + s^4/5 + ...), s = (m - 1) / (m + 1); ln 2 in two parts
  function automatic real exact_ln(input real arg);
    logic [63:0] bits;
    real exponent, mantissa, ratio, square;
    bits = $realtobits(arg);
    exponent = real'(bits[62:52]) - 1022.0;
    mantissa = $bitstoreal({12'd1022, bits[51:0]});
    if (mantissa < 0.70710678118654757) begin
      mantissa = mantissa + mantissa;
      exponent = exponent - 1.0;
    end
    ratio = (mantissa - 1.0) / (mantissa + 1.0);
    square = ratio * ratio;
    return exponent * 0.6931471803691238 + (exponent * 1.9082149292705877e-10 + (2.0 * ratio)
        * ((((((((((1.0 / 21.0 * square + 1.0 / 19.0) * square + 1.0 / 17.0) * square
        + 1.0 / 15.0) * square + 1.0 / 13.0) * square + 1.0 / 11.0) * square + 1.0 / 9.0) * square
        + 1.0 / 7.0) * square + 1.0 / 5.0) * square + 1.0 / 3.0) * square + 1.0));
  endfunction

  // exp(k ln 2 + r) = 2^k (1 + 2 r / (r coth(r/2) - r)), r coth(r/2) = 2 + r^2/6 - r^4/360 + ...
  function real exact_exp(input real arg);
    real power, rest, square;
    power = (arg * 1.4426950408889634 + ROUND) - ROUND;
    rest = (arg - power * 0.6931471803691238) - power * 1.9082149292705877e-10;
    square = rest * rest;
    return (2.0 * rest / (((((((-691.0 / 653837184000.0 * square + 1.0 / 23950080.0) * square
        - 1.0 / 604800.0) * square + 1.0 / 15120.0) * square - 1.0 / 360.0) * square + 1.0 / 6.0)
        * square + 2.0) - rest) + 1.0) * 2.0 ** power;
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
