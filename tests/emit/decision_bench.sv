// Plays decisions from a file to one instance and prints what came of each.
// Of each line: ticks since the last reset edge, length of the decision phase, inp, inn, vdd.
`timescale 1fs/1fs

module decision_bench;
  real inp, inn, vdd;
  logic clk;
  wire outp, outn, unresolved;

  `CELL #(.SEED(64'd`SEED), .MISMATCH_ON(1), .PROCESS(`PROCESS), .TEMPERATURE_C(`TEMPERATURE_C),
          .OFFSET_SHIFT_V(`OFFSET_SHIFT_V), .WARNINGS(0)) dut (
    .inp(inp), .inn(inn), .clk(clk), .outp(outp), .outn(outn), .vdd(vdd), .unresolved(unresolved)
  );

  int file;
  longint gap, phase;
  logic [63:0] inp_word, inn_word, vdd_word;
  time edge_at, end_at, ready_at, reset_at;
  logic shown, failed;

  // The first change in the decision phase is the ready, the last one after it the reset.
  always @(outp or outn) begin
    if (clk === 1'b1 && ready_at < edge_at) ready_at = $time;
    if (clk === 1'b0) reset_at = $time;
  end

  initial begin
    clk = 1'b0;
    vdd = 1.2;
    inp = 0.0;
    inn = 0.0;
    ready_at = 0;
    #100;
    file = $fopen("decisions.txt", "r");
    while ($fscanf(file, "%d %d %h %h %h", gap, phase, inp_word, inn_word, vdd_word) == 5) begin
      #(gap - 5);
      inp = $bitstoreal(inp_word);
      inn = $bitstoreal(inn_word);
      vdd = $bitstoreal(vdd_word);
      #5;
      if (edge_at > 0) $display("%0d", reset_at - end_at);
      edge_at = $time;
      clk = 1'b1;
      #(phase);
      end_at = $time;
      clk = 1'b0;
      #1 $write("%h %0d %b%b ", $realtobits(dut.overdrive_v),
                ready_at < edge_at ? 64'd0 : ready_at - edge_at, outp, unresolved);
    end
    #1000000 $display("%0d", reset_at - end_at);
    $finish;
  end
endmodule
