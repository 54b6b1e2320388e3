// One comparator under check whose pins have their levels from the very start: nothing changes
// before the clock does. After WAIT_TICKS the clock goes through two decisions of PHASE_TICKS with
// resets as long. Every instant at which an output changed is recorded as by the block harness.
//
// Macros: those of the block harness.

module still_harness #(
  parameter int INDEX = 0,
  parameter logic CLK = 1'b0,
  parameter logic ENABLE = 1'b1,
  parameter real INP_V = 0.0,
  parameter real INN_V = 0.0,
  parameter real VDD_V = 0.0,
  parameter longint WAIT_TICKS = 1,
  parameter longint PHASE_TICKS = 1,
  parameter real TEMPERATURE_C = 27.0,
  parameter int PROCESS = 0,
  parameter int DELAY_ON = 1
);
  logic clk = CLK;
  logic enable = ENABLE;
  real inp = INP_V;
  real inn = INN_V;
  real vdd = VDD_V;
  wire outp;
  wire outn;
  wire unresolved;

  `CELL #(
    .NOISE_ON(0), .WARNINGS(0), .DELAY_ON(DELAY_ON), .TEMPERATURE_C(TEMPERATURE_C),
    .PROCESS(PROCESS)
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

  wire [3:0] x_cause = dut.x_cause;
  logic [63:0] energy = 64'd0;
`ifdef READS_ENERGY_J
  always @(dut.energy_j) energy = $realtobits(dut.energy_j);
`endif

  string record_name;
  int record;
  time recorded_at = 0;

  initial begin : play
    $sformat(record_name, "%0d.events", INDEX);
    record = $fopen(record_name, "w");
    $fstrobe(record, "%20d%b%b%b%h%h", $time, outp, outn, unresolved, x_cause, energy);
    #(WAIT_TICKS);
    repeat (4) begin
      clk = ~clk;
      #(PHASE_TICKS);
    end
    $fclose(record);
  end

  always @(outp or outn or unresolved or x_cause or energy) begin : record_change
    if ($time != recorded_at) begin
      recorded_at = $time;
      $fstrobe(record, "%20d%b%b%b%h%h", $time, outp, outn, unresolved, x_cause, energy);
    end
  end
endmodule
