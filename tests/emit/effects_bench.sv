// Plays a file of moments to one instance and prints what changes and what can be read inside.
// Of each line: time in ticks, clock (0, 1 or x), inp, inn, vdd, and 1 where the insides are to be
// printed before anything changes.
`timescale 1fs/1fs

module effects_bench;
  real inp, inn, vdd;
  logic clk;
  wire outp, outn, unresolved;

  `CELL #(`PARAMETERS) dut (
    .inp(inp), .inn(inn), .clk(clk), .outp(outp), .outn(outn), .vdd(vdd), .unresolved(unresolved)
  );

  int file, report;
  longint moment;
  logic level;
  logic [63:0] inp_word, inn_word, vdd_word;

  wire [3:0] x_cause = dut.x_cause;
  always @(outp or outn or unresolved or x_cause)
    $strobe("C %0d %b%b%b%0d", $time, outp, outn, unresolved, x_cause);

  initial begin
    clk = 1'b0;
    vdd = 1.2;
    inp = 0.0;
    inn = 0.0;
    file = $fopen("moments.txt", "r");
    while ($fscanf(file, "%d %b %h %h %h %d", moment, level, inp_word, inn_word, vdd_word,
                   report) == 6) begin
      #(moment - $time);
      if (report == 1)
        $display("R %h %h", $realtobits(dut.overdrive_v), $realtobits(dut.energy_j));
      inp = $bitstoreal(inp_word);
      inn = $bitstoreal(inn_word);
      vdd = $bitstoreal(vdd_word);
      clk = level;
    end
    $finish;
  end
endmodule
