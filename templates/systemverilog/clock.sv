
  // -- Clock: only a clean step from one level to the other counts ------------------------------

  always @({{ pins.clk }}) begin
    if ({{ pins.clk }} === {{ deciding }} && clk_level === {{ resting }}) begin
      decision_count = decision_count + 64'd1;
{% if is_on %}
      if (is_on) begin
{% filter indent(2, first=true) %}
{% include "systemverilog/decision_edge.sv" %}
{% endfilter %}
      end
{% else %}
{% include "systemverilog/decision_edge.sv" %}
{% endif %}
    end else if ({{ pins.clk }} === {{ resting }} && clk_level === {{ deciding }}) begin
{% if is_on %}
      if (is_on) begin
{% filter indent(2, first=true) %}
{% include "systemverilog/reset_edge.sv" %}
{% endfilter %}
      end
{% else %}
{% include "systemverilog/reset_edge.sv" %}
{% endif %}
    end else if ({{ pins.clk }} !== clk_level) begin  // else it came back within the same instant
      {{ "if (is_on) " if is_on }}unclean_step;
    end
    clk_level = {{ pins.clk }};
  end

  // To a level that is neither 0 nor 1, or from there
  task unclean_step;
    if ({{ pins.clk }} !== 1'b0 && {{ pins.clk }} !== 1'b1) begin
      lose_outputs(4);
      if (decision_count != 64'd0) begin
        clock_warnings = clock_warnings + 1;
        if (clock_warnings == 1) warn("the clock is unknown");
      end
    end
{% if not holds %}
    if ({{ pins.clk }} === {{ resting }}) power_up;
{% endif %}
  endtask
