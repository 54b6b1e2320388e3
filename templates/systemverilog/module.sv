{% for line in header %}
{{ line }}
{% endfor %}

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

  // Verilator: what its checks report here is meant.
  // verilator lint_off BLKSEQ       waiting processes can only assign blocking
  // verilator lint_off REALCVT      reals are rounded to whole time steps by assigning them
  // verilator lint_off UNUSEDPARAM  parameters of effects that are not characterised
  // verilator lint_off UNUSEDSIGNAL variables that are there to be read from outside
  // Compile with -ffp-contract=off where it may fuse multiplications and additions:
  // random numbers would differ in their last bits.
{% include "systemverilog/state.sv" %}
{% include "systemverilog/clock.sv" %}
{% include "systemverilog/decision.sv" %}
{% if delay == "curve" %}
{% include "systemverilog/delay_curve.sv" %}
{% endif %}
{% include "systemverilog/outputs.sv" %}
{% if can_be_off %}
{% include "systemverilog/supply.sv" %}
{% endif %}
{% include "systemverilog/conditions.sv" %}
{% include "systemverilog/start.sv" %}
{% include "systemverilog/random.sv" %}
{% include "systemverilog/messages.sv" %}
endmodule
