
  // -- Supply and enable ------------------------------------------------------------------------

  always @({{ off_events }}) begin
    if (is_on != ({{ is_on }})) begin
      is_on = !is_on;
      if (!is_on) lose_outputs(2);
{% if not holds %}
      else if (clk_level === {{ resting }}) power_up;
{% endif %}
    end
  end
