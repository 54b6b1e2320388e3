// Drives {{ cell }}, its symbol and the bus alike and compares them.
{% for line in remarks %}
// {{ line }}
{% endfor %}
module {{ cell }}_shells;
  timeunit {{ precision }};
  timeprecision {{ precision }};
  localparam int DECISIONS = 200;
  localparam longint PHASE = {{ phase_ticks }};

  bit done = 1'b0;
  int compared = 0;
  int faults = 0;

  logic clk = {{ resting }};
  logic power = 1'b1;
  real inp = {{ vcm }};
  real inn = {{ vcm }};
  real vdd = {{ supply }};
  bit [15:0] state = 16'd1;
  wire core_p;
  wire symbol_p;
  wire [2:0] bus_p;
  // Not compared
  wire core_n, core_flag, symbol_n, symbol_flag;
  wire [2:0] bus_n, bus_flag;

  {{ cell }} #(.SEED(64'd5), .WARNINGS(0)) core (
{% for port, net in core_connections %}
    .{{ port }}({{ net }}){{ "," if not loop.last }}
{% endfor %}
  );

  {{ symbol.name }} #(.SEED(64'd5), .WARNINGS(0)) shell (
{% for port, net in symbol_connections %}
    .{{ port }}({{ net }}){{ "," if not loop.last }}
{% endfor %}
  );

  wire [63:0] inp_word = $realtobits(inp);
  wire [63:0] inn_word = $realtobits(inn);

  {{ cell }}_bus #(.COUNT(3), .SEED(64'd5), .WARNINGS(0)) several (
{% for port, net in bus_connections %}
    .{{ port }}({{ net }}){{ "," if not loop.last }}
{% endfor %}
  );

  initial begin : play
    #(PHASE);
    for (int i = 0; i < DECISIONS; i++) begin
      state = state * 16'd25173 + 16'd13849;
      inp = {{ vcm }} + (real'(state) - 32768.0) * {{ step_v }};
      inn = {{ vcm }} - (real'(state) - 32768.0) * {{ step_v }};
      #(PHASE) clk = ~{{ resting }};
      #(PHASE);
      same("the symbol", symbol_p, core_p);
      same("the bus", bus_p[0], core_p);
      clk = {{ resting }};
    end
{% if has_supplies %}
    // Without power the outputs are unknown, which only a simulator with X can show.
    #(PHASE) power = 1'b0;
    #(PHASE) same("the symbol without power", symbol_p, 1'bx);
{% endif %}
    done = 1'b1;
  end

  task automatic same(input string what, input logic got, input logic want);
    compared = compared + 1;
    if (got !== want) begin
      faults = faults + 1;
      if (faults <= 5) begin
        $display("FAIL  %0s: %b at %0.6f ns, expected %b", what, got,
                 $realtime * {{ ns_per_tick }}, want);
      end
    end
  endtask
endmodule
