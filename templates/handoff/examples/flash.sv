// CHIPS flash converters side by side, each a {{ cell }}_bus. Whenever `start` changes, all convert
// `vin`, which is differential and ranges over 2^BITS steps of `lsb_v` around 0; then `done`
// changes. `result` holds each chip's comparators, the lowest threshold of the first chip first.
module converter #(
  parameter int BITS = {{ bits }},
  parameter int CHIPS = {{ chips }}
) (
  input  logic start,
  input  real vin,
  input  real lsb_v,
  input  real phase_ticks,
  output logic done,
  output logic [CHIPS*(2**BITS-1)-1:0] result,
  output int lost,       // decisions that were not resolved in time
  output real easy_s,
  output real slowest_s
);
  timeunit {{ precision }};
  timeprecision {{ precision }};
  localparam int COUNT = 2 ** BITS - 1;

  logic clk = {{ resting }};
  logic [64*COUNT-1:0] inp;
  logic [64*COUNT-1:0] inn;
  real half_v;
  wire [CHIPS*COUNT-1:0] outp;
  wire [CHIPS*COUNT-1:0] outn;
  wire [CHIPS*COUNT-1:0] unresolved;
  logic [CHIPS*COUNT-1:0] shown;

  for (genvar c = 0; c < CHIPS; c++) begin : chip
    {{ cell }}_bus #(
      .COUNT(COUNT),
{% for name, value in parameters %}
      .{{ name }}({{ value }}){{ "," if not loop.last }}
{% endfor %}
    ) comparators (
{% for port, net in connections %}
      .{{ port }}({{ net }}){{ "," if not loop.last }}
{% endfor %}
    );
  end

  assign easy_s = 0.0;
  assign slowest_s = 0.0;

  initial begin
    done = 1'b0;
    result = '0;
    lost = 0;
  end

  always @(start) begin : convert
    for (int k = 0; k < COUNT; k = k + 1) begin
      half_v = 0.5 * (vin - (real'(k) + 1.0 - {{ middle_code }}) * lsb_v);
      inp[64*k +: 64] = $realtobits({{ common_v }} + half_v);
      inn[64*k +: 64] = $realtobits({{ common_v }} - half_v);
    end
    #({{ reset_ticks }}) clk = ~{{ resting }};
    #(phase_ticks) shown = outp;
    clk = {{ resting }};
    #1;
    lost = $countones(unresolved);
    result = shown & ~unresolved;
    #({{ reset_ticks }}) done = ~done;
  end
endmodule
