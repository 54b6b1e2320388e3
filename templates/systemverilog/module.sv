{% for line in head %}
{{ line }}
{% endfor %}

// Waivers. Parameters: those of effects that are not characterised are there all the same, so that
// every cell has the same. Signals: some are there to be read from outside, and some algorithms
// use a part of a word. Delays: some resets take none. Nets: the supply both switches the cell and
// is an operand. First values: there is no pin that could give them. Names: constants are written
// like parameters. Lifetimes: that of a module, which is static; nothing is kept in a task.
// verilator lint_save
// verilator lint_off UNUSEDPARAM
// verilator lint_off UNUSEDSIGNAL
// verilator lint_off ZERODLY
// verilator lint_off SYNCASYNCNET
// verilator lint_off PROCASSINIT
// verilog_lint: waive-start parameter-name-style
// verilog_lint: waive-start explicit-task-lifetime
// verilog_lint: waive-start explicit-function-lifetime
`ifdef __slang__
`pragma diagnostic push
`pragma diagnostic ignore="-Wunused"
`endif

module {{ cell.name }} #(
{% for line in parameters %}
  {{ line }}
{% endfor %}
) (
{% for line in ports %}
  {{ line }}
{% endfor %}
);
  timeunit {{ cell.time_precision }};
  timeprecision {{ cell.time_precision }};
  localparam real TICKS_PER_S = {{ ticks_per_s }};  // times are whole numbers of ticks
{% if delay or needs_exact_exp %}
  localparam real ROUND = 6755399441055744.0;  // 1.5 * 2^52: a sum with it is a whole number
{% endif %}
{% include "systemverilog/state.sv" %}
{% include "systemverilog/start.sv" %}
{% include "systemverilog/clock.sv" %}
{% include "systemverilog/decision.sv" %}
{% if delay == "curve" %}
{% include "systemverilog/delay_curve.sv" %}
{% endif %}
{% include "systemverilog/outputs.sv" %}
{% if not holds %}
{% include "systemverilog/reset.sv" %}
{% endif %}
{% if is_on %}
{% include "systemverilog/supply.sv" %}
{% endif %}
{% include "systemverilog/conditions.sv" %}
{% include "systemverilog/random.sv" %}
{% include "systemverilog/messages.sv" %}
endmodule

`ifdef __slang__
`pragma diagnostic pop
`endif
// verilator lint_restore
// verilog_lint: waive-stop parameter-name-style
// verilog_lint: waive-stop explicit-task-lifetime
// verilog_lint: waive-stop explicit-function-lifetime
