
  // -- Clock: only a clean step from one level to the other counts ------------------------------

  always @({{ pins.clk }}) begin
    if ({{ pins.clk }} === {{ deciding }} && clk_level === {{ resting }}) decide;
    else if ({{ pins.clk }} === {{ resting }} && clk_level === {{ deciding }}) end_phase;
    else if ({{ pins.clk }} !== 1'b0 && {{ pins.clk }} !== 1'b1) lose_clock;
{% if not holds %}
    else if ({{ pins.clk }} === {{ resting }} && clk_level !== {{ resting }}) {{ "begin" if is_on else "power_up;" }}
{% if is_on %}
      if (is_on) power_up;
    end
{% endif %}
{% endif %}
    clk_level = {{ pins.clk }};
  end

  task lose_clock;
    if (clk_level === 1'b0 || clk_level === 1'b1) begin
{% if is_on %}
      if (is_on) begin
        lose_outputs(4);
        if (decision_count != 64'd0) clock_warnings = clock_warnings + 1;
        if (clock_warnings == 1) warn("the clock is unknown");
      end
{% else %}
      lose_outputs(4);
      if (decision_count != 64'd0) clock_warnings = clock_warnings + 1;
      if (clock_warnings == 1) warn("the clock is unknown");
{% endif %}
    end
  endtask
