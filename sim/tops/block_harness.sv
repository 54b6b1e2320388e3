// One comparator under check with everything that plays stimulus to it and records what it shows.
//
// A run plays two files of the working folder side by side, in big-endian words of 64 bits:
//   <index>.clock    pairs    ticks at the reset level, ticks at the deciding level
//   <index>.inputs   fours    ticks to wait, then inp, inn and vdd as IEEE 754 doubles
// or, with SCRIPTED = 1, a single one that knows all pins:
//   <index>.script   fives    ticks to wait, clock + 4 enable (0 1 2 = X 3 = Z), inp, inn, vdd
// and records every instant at which an output changed, after it has settled, as a line of
// 24 characters: time in ticks (20), outp, outn, unresolved (0 1 x z), x_cause; and where there is
// an energy 16 more, the bits of its running total.
//
// +play_from=<index> +play_to=<index> plays these runs side by side, each says when it is played.
// Benches may instead drive the inputs of idle units.
// Macros: CELL names the module, PARAMETERS connects those that it has, PIN_* names its pins (a
// pin without macro is left out), DECIDING the
// clock's deciding level, TICK the unit of all times; READS_X_CAUSE and READS_ENERGY_J say that
// x_cause and energy_j are there to be read.

`resetall
`timescale `TICK/`TICK

module block_harness #(
  parameter int INDEX = 0,
  parameter int SCRIPTED = 0,
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

  `CELL #(`PARAMETERS) dut (
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

`ifdef READS_ENERGY_J
  logic [63:0] energy = 64'd0;
  always @(dut.energy_j) energy = $realtobits(dut.energy_j);
  `define RECORD $fstrobe(record, "%20d%b%b%b%h%h", $time, outp, outn, unresolved, x_cause, energy)
  `define RECORDED outp or outn or unresolved or x_cause or energy
`else
  `define RECORD $fstrobe(record, "%20d%b%b%b%h", $time, outp, outn, unresolved, x_cause)
  `define RECORDED outp or outn or unresolved or x_cause
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
      if (INDEX >= first && INDEX <= last) begin
        check_top.playing = check_top.playing + 1;
        #1 start = 1'b1;
      end
    end
  end

  always @(posedge start) begin : open_record
    $sformat(record_name, "%0d.events", INDEX);
    record = $fopen(record_name, "w");
    recorded_at = $time;
    `RECORD;
  end

  always @(`RECORDED) begin : record_change
    if (start === 1'b1 && $time != recorded_at) begin
      recorded_at = $time;
      `RECORD;
    end
  end

  string clock_name;
  int clock_file;
  logic [127:0] phases;

  always @(posedge start) if (SCRIPTED == 0) begin : play_clock
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

  always @(posedge start) if (SCRIPTED == 0) begin : play_inputs
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

  string script_name;
  int script_file;
  logic [319:0] pins;

  always @(posedge start) if (SCRIPTED != 0) begin : play_script
    $sformat(script_name, "%0d.script", INDEX);
    script_file = $fopen(script_name, "rb");
    while ($fread(pins, script_file) == 40) begin
      #(pins[319:256]);
      inp = $bitstoreal(pins[191:128]);
      inn = $bitstoreal(pins[127:64]);
      vdd = $bitstoreal(pins[63:0]);
      enable = level_of(pins[195:194]);
      clk = level_of(pins[193:192]);
    end
    $fclose(script_file);
    clock_done = 1'b1;
    inputs_done = 1'b1;
  end

  function automatic logic level_of(input logic [1:0] code);
    case (code)
      2'd0: return 1'b0;
      2'd1: return 1'b1;
      2'd2: return 1'bx;
      default: return 1'bz;
    endcase
  endfunction

  // +dump_from=<ticks> +dump_to=<ticks>, counted from the start, leave a window of the waveforms
  time dump_from;
  time dump_to;

  always @(posedge start) begin : dump_window
    if ($value$plusargs("dump_from=%d", dump_from) && $value$plusargs("dump_to=%d", dump_to)) begin
      $dumpfile("window.vcd");
      #(dump_from) $dumpvars(0, clk, inp, inn, vdd, enable, outp, outn, unresolved, x_cause, dut);
      #(dump_to - dump_from) $dumpoff;
    end
  end

  // The last run to end ends the simulation
  always @(posedge done) begin : close_record
    #1 $fclose(record);
    $display("[block] %0d played", INDEX);
    check_top.playing = check_top.playing - 1;
    if (check_top.playing == 0) $finish(0);
  end
endmodule
