// A SAR converter around one {{ cell }}. Whenever `start` changes, it converts `vin`, which is
// differential and ranges over 2^BITS steps of `lsb_v` around 0; then `done` changes.
module converter #(
  parameter int BITS = {{ bits }}
) (
  input  logic start,
  input  real vin,
  input  real lsb_v,
  input  real phase_ticks,
  output logic done,
  output logic [BITS-1:0] result,
  output int lost,       // decisions that were not resolved in time
  output real easy_s,    // delays of all decisions but the slowest
  output real slowest_s  // that of the slowest one
);
  timeunit {{ precision }};
  timeprecision {{ precision }};

  logic clk = {{ resting }};
  real inp = {{ common_v }};
  real inn = {{ common_v }};
  real threshold_v;
  logic shown;
  real easy = 0.0;
  real slowest = 0.0;
  wire outp;
  wire outn;
  wire unresolved;

  {{ cell }} #(
{% for name, value in parameters %}
    .{{ name }}({{ value }}){{ "," if not loop.last }}
{% endfor %}
  ) comparator (
{% for port, net in connections %}
    .{{ port }}({{ net }}){{ "," if not loop.last }}
{% endfor %}
  );

  assign easy_s = easy;
  assign slowest_s = slowest;

  initial begin
    done = 1'b0;
    result = '0;
    lost = 0;
  end

  always @(start) begin : convert
    easy = 0.0;
    slowest = 0.0;
    lost = 0;
    result = '0;
    for (int k = BITS - 1; k >= 0; k = k - 1) begin
      result[k] = 1'b1;
      threshold_v = (real'(result) - {{ middle_code }}) * lsb_v;
      inp = {{ common_v }} + 0.5 * (vin - threshold_v);
      inn = {{ common_v }} - 0.5 * (vin - threshold_v);
      #({{ reset_ticks }}) clk = ~{{ resting }};
      #(phase_ticks) shown = outp;
      clk = {{ resting }};
      #1;
      // What did not resolve in time is read as a zero.
      if (unresolved) lost = lost + 1;
      result[k] = shown && !unresolved;
      easy = easy + (comparator.delay_s < slowest ? comparator.delay_s : slowest);
      if (comparator.delay_s > slowest) slowest = comparator.delay_s;
    end
    #({{ reset_ticks }}) done = ~done;
  end
endmodule
