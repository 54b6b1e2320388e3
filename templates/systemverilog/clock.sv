
  // -- Clock: only a clean step from one level to the other counts ------------------------------

  always @({{ pins.clk }}) begin
    case ({clk_level, {{ pins.clk }}})
      {{ deciding_step }}: begin
        decision_count = decision_count + 64'd1;
{% if not holds %}
        if (returning) cancel_return;
{% endif %}
        {{ "if (is_on) " if is_on }}decide;
      end
      {{ resetting_step }}: {{ "if (is_on) " if is_on }}end_phase;
      2'b00, 2'b11: ;  // it came back within the same instant
      default: {{ "if (is_on) " if is_on }}unclean_step;
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
