
  // -- Clock: only a clean step from one level to the other counts ------------------------------

  always @({{ clk }}) begin
    if ({{ clk }} === {{ deciding }} && clk_level === {{ resting }}) decide;
    else if ({{ clk }} === {{ resting }} && clk_level === {{ deciding }}) end_phase;
{% if not holds %}
    else if ({{ clk }} === {{ resting }}) begin
      if (clk_level === 1'bx{{ " && on" if can_be_off }}) return_to_reset(1);
    end
{% endif %}
    else if ({{ clk }} !== {{ deciding }}{{ " && " ~ clk ~ " !== " ~ resting if holds }}) lose_clock;
    clk_level = ({{ clk }} === 1'b0 || {{ clk }} === 1'b1) ? {{ clk }} : 1'bx;
  end

  task lose_clock;
    begin
      if (clk_level !== 1'bx{{ " && on" if can_be_off }}) begin
        lose_outputs(4);
        if (decision_count > 0) warn(clock_warnings, "the clock is unknown");
      end
    end
  endtask
