
  // -- Clock: only a clean step from one level to the other counts ------------------------------

  always @({{ pins.clk }}) begin
    case ({clk_level, {{ pins.clk }}})
      {{ deciding_step }}: begin
        decision_count = decision_count + 64'd1;
{% if is_on %}
        if (is_on) begin
{% filter indent(4, first=true) %}
{% include "systemverilog/decision_edge.sv" %}
{% endfilter %}
        end
{% else %}
{% filter indent(2, first=true) %}
{% include "systemverilog/decision_edge.sv" %}
{% endfilter %}
{% endif %}
      end
      {{ resetting_step }}: begin
{% if is_on %}
        if (is_on) begin
{% filter indent(4, first=true) %}
{% include "systemverilog/reset_edge.sv" %}
{% endfilter %}
        end
{% else %}
{% filter indent(2, first=true) %}
{% include "systemverilog/reset_edge.sv" %}
{% endfilter %}
{% endif %}
      end
      default: begin
        if ({{ "is_on && " if is_on }}{{ pins.clk }} !== clk_level) unclean_step;  // else it came back at once
      end
    endcase
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
