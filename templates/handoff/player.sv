// Plays vectors to one {{ cell }} and compares what it shows.
{% for line in remarks %}
// {{ line }}
{% endfor %}
//
// All files hold words of 64 bits and end with the checksum of the words before it.
//   clock      two words a decision: its edge, and the end of its decision phase
//   inputs     four words a change: its time, then inp, inn and vdd as IEEE 754 doubles
//   expected   one word a look: time, then two bits each for unresolved, outn and outp:
//              0, 1, 2 unknown (compared where the simulator knows X), 3 not compared
// Times are whole units of {{ precision }} from the start of the simulation.

// verilator lint_off ZERODLY
module {{ cell }}_player #(
  parameter NAME = "",
  parameter CLOCK = "",
  parameter INPUTS = "",
  parameter EXPECTED = "",
  parameter int DECISIONS = 1,
  parameter int CHANGES = 1,
  parameter int LOOKS = 1,
  parameter int NOISE_ON = 1,
  parameter int MISMATCH_ON = 0,
  parameter bit [63:0] SEED = 64'd1,
  parameter real TEMPERATURE_C = 27.0,
  parameter int PROCESS = 0,
  parameter int UNRESOLVED_MODE = 0,
  parameter int FORCE_UNRESOLVED_EVERY = 0
);
  timeunit {{ precision }};
  timeprecision {{ precision }};
  localparam int MOST_TOLD = 5;

  logic [63:0] edges [0:2*DECISIONS];
  logic [63:0] levels [0:4*CHANGES];
  logic [63:0] expected [0:LOOKS];
  logic [63:0] total;
  bit loaded = 1'b0;  // all files are whole
  bit damaged = 1'b0;
  bit done = 1'b0;
  int compared = 0;
  int faults = 0;

  logic clk = {{ resting }};
  logic enable = 1'b1;
  real inp = 0.0;
  real inn = 0.0;
  real vdd = 0.0;
  wire outp;
  wire outn;
  wire unresolved;

  {{ cell }} #(
    .NOISE_ON(NOISE_ON),
    .MISMATCH_ON(MISMATCH_ON),
    .SEED(SEED),
    .TEMPERATURE_C(TEMPERATURE_C),
    .PROCESS(PROCESS),
    .UNRESOLVED_MODE(UNRESOLVED_MODE),
    .FORCE_UNRESOLVED_EVERY(FORCE_UNRESOLVED_EVERY),
    .WARNINGS(0)
  ) dut (
{% for port, net in connections %}
    .{{ port }}({{ net }}){{ "," if not loop.last }}
{% endfor %}
  );

  initial begin : load
    $readmemh(CLOCK, edges);
    $readmemh(INPUTS, levels);
    $readmemh(EXPECTED, expected);
    total = 64'hcbf29ce484222325;
    for (int i = 0; i < 2 * DECISIONS; i++) total = (total ^ edges[i]) * 64'h00000100000001b3;
    damaged = differ(total, edges[2 * DECISIONS]);
    total = 64'hcbf29ce484222325;
    for (int i = 0; i < 4 * CHANGES; i++) total = (total ^ levels[i]) * 64'h00000100000001b3;
    damaged = damaged || differ(total, levels[4 * CHANGES]);
    total = 64'hcbf29ce484222325;
    for (int i = 0; i < LOOKS; i++) total = (total ^ expected[i]) * 64'h00000100000001b3;
    damaged = damaged || differ(total, expected[LOOKS]);
    if (damaged) begin
      $display("FAIL  %0s: a vector file is missing or damaged", NAME);
      done = 1'b1;
    end else begin
      #1 loaded = 1'b1;
    end
  end

  // Words that are missing are unknown, and so are sums of them
  function automatic bit differ(input logic [63:0] sum, input logic [63:0] stated);
    return (^sum === 1'bx) || sum !== stated;
  endfunction

  always @(posedge loaded) begin : play_clock
    for (int i = 0; i < DECISIONS; i++) begin
      #(edges[2 * i] - $time) clk = ~{{ resting }};
      #(edges[2 * i + 1] - $time) clk = {{ resting }};
    end
  end

  always @(posedge loaded) begin : play_inputs
    for (int k = 0; k < CHANGES; k++) begin
      #(levels[4 * k] - $time);
      inp = $bitstoreal(levels[4 * k + 1]);
      inn = $bitstoreal(levels[4 * k + 2]);
      vdd = $bitstoreal(levels[4 * k + 3]);
    end
  end

  always @(posedge loaded) begin : compare
    for (int n = 0; n < LOOKS; n++) begin
      #({6'd0, expected[n][63:6]} - $time);
      look("{{ outp }}", outp, expected[n][1:0]);
      look("{{ outn }}", outn, expected[n][3:2]);
      look("{{ unresolved }}", unresolved, expected[n][5:4]);
    end
    done = 1'b1;
  end

  // A two-state simulator cannot hold an unknown: there it is not compared.
  logic probe = 1'bx;

  task automatic look(input string pin, input logic got, input bit [1:0] want);
    bit is_compared, is_wrong, four_states;
    four_states = probe !== 1'b0 && probe !== 1'b1;
    is_compared = want < 2'd2 || (want == 2'd2 && four_states);
    is_wrong = want == 2'd2 ? (got === 1'b0 || got === 1'b1) : got !== want[0];
    if (is_compared) compared = compared + 1;
    if (is_compared && is_wrong) begin
      faults = faults + 1;
      if (faults <= MOST_TOLD) begin
        $display("FAIL  %0s: %0s is %b at %0.6f ns, expected %0s", NAME, pin, got,
                 $realtime * {{ ns_per_tick }}, want == 2'd2 ? "x" : want[0] ? "1" : "0");
      end
    end
  endtask
endmodule
// verilator lint_on ZERODLY
