// A comparator written by hand from the words of DEVELOPERS.md, for tests of the check.
// One condition, no noise; delay, memory, aperture, energy and reset. All numbers are invented.
module latch_by_hand #(
  parameter real OFFSET_SHIFT_V = 0.0,
  parameter int NOISE_ON = 1,
  parameter int MISMATCH_ON = 0,
  parameter int MEMORY_ON = 1,
  parameter int DELAY_ON = 1,
  parameter bit [63:0] SEED = 64'd0,
  parameter real TEMPERATURE_C = 27.0,
  parameter int PROCESS = 0,
  parameter int UNRESOLVED_MODE = 0,
  parameter int FORCE_UNRESOLVED_EVERY = 0,
  parameter int WARNINGS = 0
) (
  input logic clk,
  input real inp,
  input real inn,
  input real vdd,
  output logic outp,
  output logic outn,
  output logic unresolved
);
  timeunit 1fs;
  timeprecision 1fs;

  localparam real TRIP_V = 0.003;
  localparam real TAU_S = 1.0e-11, NODE_S = 2.5e-11, NODE_V = 0.5, LEAST_V = 1e-15;
  localparam real FAST_V = 0.03, FAST_S = 1.2e-11, SLOW_V = 0.002, SLOW_S = 9.0e-11;
  localparam real LEFT_V = 2.0e-4, MOST_V = 0.02;
  localparam real APERTURE_S = 7.0e-12, RESET_S = 3.0e-11;
  localparam real FIXED_J = 4.0e-14, RISE_W = 1.0e-4;

  real energy_j = 0.0;
  real e, shift, aperture, wait_ticks, rest_ticks, edge_time, reset_time;
  int last = 0;
  int decisions = 0;
  bit deciding = 1'b0, resetting = 1'b0;
  logic level = 1'bx;

  // exp(x) by the published steps of formulas/exact_math.py
  function automatic real exact_exp(input real x);
    real k, r, square, below;
    longint biased;
    k = $floor(x * 1.4426950408889634 + 0.5);
    r = (x - k * 0.6931471803691238) - k * 1.9082149292705877e-10;
    square = r * r;
    below = (((((((-691.0 / 653837184000.0) * square + 1.0 / 23950080.0) * square
        - 1.0 / 604800.0) * square + 1.0 / 15120.0) * square - 1.0 / 360.0) * square
        + 1.0 / 6.0) * square + 2.0) - r;
    biased = longint'(k) + 1023;
    return (2.0 * r / below + 1.0) * $bitstoreal({1'b0, biased[10:0], 52'd0});
  endfunction

  function automatic real memory_v(input real rest_s);
    real sum;
    sum = LEFT_V;
    if (rest_s / FAST_S <= 700.0) sum = sum + FAST_V * exact_exp(-(rest_s / FAST_S));
    if (rest_s / SLOW_S <= 700.0) sum = sum + SLOW_V * exact_exp(-(rest_s / SLOW_S));
    return sum < MOST_V ? sum : MOST_V;
  endfunction

  function automatic real delay_ticks(input real overdrive_v);
    real size;
    size = overdrive_v < 0.0 ? -overdrive_v : overdrive_v;
    if (size < LEAST_V) size = LEAST_V;
    if (size >= NODE_V) return $floor(NODE_S * 1e15 + 0.5);
    return $floor((NODE_S + TAU_S * $ln(NODE_V / size)) * 1e15 + 0.5);
  endfunction

  initial begin
    outp = 1'bx;
    outn = 1'bx;
    unresolved = 1'b0;
    wait (clk === 1'b0);
    #1 rest;
  end

  task rest;
    outp = 1'b1;
    outn = 1'b1;
  endtask

  always @(clk) begin
    if (level === 1'b0 && clk === 1'b1) decide;
    if (level === 1'b1 && clk === 1'b0) stop;
    level = clk;
  end

  task decide;
    resetting = 1'b0;
    disable return_to_rest;
    decisions = decisions + 1;
    edge_time = $realtime;
    shift = 0.0;
    if (MEMORY_ON != 0 && last != 0) shift = last * memory_v(($realtime - reset_time) / 1e15);
    aperture = DELAY_ON != 0 ? $floor(APERTURE_S * 1e15 + 0.5) : 0.0;
    deciding = 1'b1;
  endtask

  always begin : follow
    wait (deciding);
    #(aperture);
    e = ((inp - inn) - (TRIP_V + OFFSET_SHIFT_V)) + shift;
    wait_ticks = 1.0;
    if (DELAY_ON != 0) wait_ticks = delay_ticks(e) - aperture;
    if (wait_ticks < 1.0) wait_ticks = 1.0;
    #(wait_ticks);
    if (FORCE_UNRESOLVED_EVERY <= 0 || decisions % FORCE_UNRESOLVED_EVERY != 0) show;
    wait (!deciding);
  end

  task show;
    deciding = 1'b0;
    outp = e > 0.0;
    outn = !(e > 0.0);
    unresolved = 1'b0;
    last = e > 0.0 ? 1 : -1;
    energy_j = energy_j + (FIXED_J + RISE_W * (($realtime - edge_time) / 1e15));
  endtask

  // Whatever is ready in this very instant is shown first
  task stop;
    #0;
    #0;
    reset_time = $realtime;
    rest_ticks = DELAY_ON != 0 ? $floor(RESET_S * 1e15 + 0.5) : 0.0;
    if (deciding) begin
      deciding = 1'b0;
      disable follow;
      last = 0;
      unresolved = 1'b1;
      if (UNRESOLVED_MODE == 0) begin
        outp = 1'bx;
        outn = 1'bx;
      end
      energy_j = energy_j + (FIXED_J + RISE_W * (($realtime - edge_time) / 1e15));
      if (rest_ticks < 1.0) rest_ticks = 1.0;
    end
    resetting = 1'b1;
  endtask

  always begin : return_to_rest
    wait (resetting);
    #(rest_ticks);
    resetting = 1'b0;
    rest;
  end
endmodule
