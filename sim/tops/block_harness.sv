// One comparator under check with everything that plays stimulus to it and records what it shows.
//
// A run plays two files of the working folder side by side, in big-endian words of 64 bits:
//   <index>.clock    pairs    ticks at the reset level, ticks at the deciding level
//   <index>.inputs   fours    ticks to wait, then inp, inn and vdd as IEEE 754 doubles
// and records every instant at which an output changed, after it has settled, as a line of
// 24 characters: time in ticks (20), outp, outn, unresolved (0 1 x z), x_cause.
//
// `start` begins a run, `done` ends it. A bench may instead drive the inputs of an idle unit.
// Without benches, +play_from=<index> +play_to=<index> plays these runs side by side.
// Macros: CELL names the module, PIN_* its pins (a pin without macro is left out), DECIDING the
// clock's deciding level, TICK the unit of all times; READS_X_CAUSE says that x_cause is there.

`resetall
`timescale `TICK/`TICK

module block_harness #(
  parameter int INDEX = 0,
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
);
  logic clk;
  logic enable;
  real inp;
  real inn;
  real vdd;
  wire outp;
  wire outn;
  wire unresolved;

  logic start;
  logic clock_done;
  logic inputs_done;
  wire done = clock_done & inputs_done;

  `CELL #(
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
  ) dut (
`ifdef PIN_OUTN
    .`PIN_OUTN(outn),
`endif
`ifdef PIN_UNRESOLVED
    .`PIN_UNRESOLVED(unresolved),
`endif
`ifdef PIN_VDD
    .`PIN_VDD(vdd),
`endif
`ifdef PIN_ENABLE
    .`PIN_ENABLE(enable),
`endif
    .`PIN_CLK(clk),
    .`PIN_INP(inp),
    .`PIN_INN(inn),
    .`PIN_OUTP(outp)
  );

`ifdef READS_X_CAUSE
  wire [3:0] x_cause = dut.x_cause;
`else
  wire [3:0] x_cause = 4'bxxxx;
`endif

  string record_name;
  int record;
  time recorded_at;
  int first;
  int last;

  // The clock stays X until a run starts or a bench drives it; the supply stays off.
  initial begin
    start = 1'b0;
    clock_done = 1'b0;
    inputs_done = 1'b0;
    enable = 1'b1;
    inp = 0.0;
    inn = 0.0;
    vdd = 0.0;
    if ($value$plusargs("play_from=%d", first) && $value$plusargs("play_to=%d", last)) begin
      if (INDEX >= first && INDEX <= last) #1 start = 1'b1;
    end
  end

  always @(posedge start) begin : open_record
    $sformat(record_name, "%0d.events", INDEX);
    record = $fopen(record_name, "w");
    recorded_at = $time;
    $fstrobe(record, "%20d%b%b%b%h", $time, outp, outn, unresolved, x_cause);
  end

  always @(outp or outn or unresolved or x_cause) begin : record_change
    if (start === 1'b1 && $time != recorded_at) begin
      recorded_at = $time;
      $fstrobe(record, "%20d%b%b%b%h", $time, outp, outn, unresolved, x_cause);
    end
  end

  string clock_name;
  int clock_file;
  logic [127:0] phases;

  always @(posedge start) begin : play_clock
    clk = ~`DECIDING;
    $sformat(clock_name, "%0d.clock", INDEX);
    clock_file = $fopen(clock_name, "rb");
    while ($fread(phases, clock_file) == 16) begin
      #(phases[127:64]) clk = `DECIDING;
      #(phases[63:0]) clk = ~`DECIDING;
    end
    $fclose(clock_file);
    clock_done = 1'b1;
  end

  string inputs_name;
  int inputs_file;
  logic [255:0] levels;

  always @(posedge start) begin : play_inputs
    $sformat(inputs_name, "%0d.inputs", INDEX);
    inputs_file = $fopen(inputs_name, "rb");
    while ($fread(levels, inputs_file) == 32) begin
      #(levels[255:192]);
      inp = $bitstoreal(levels[191:128]);
      inn = $bitstoreal(levels[127:64]);
      vdd = $bitstoreal(levels[63:0]);
    end
    $fclose(inputs_file);
    inputs_done = 1'b1;
  end

  always @(posedge done) begin : close_record
    $fclose(record);
  end
endmodule
