
  // -- Supply and enable ------------------------------------------------------------------------

  always @({{ off_events }}) begin
{% if pins.vdd and supply.matters %}
    vdd_changed = 1'b1;
{% if common_mode.matters %}
    vcm_step_end = vcm_step;  // an empty range: all conditions are to be taken in anew
{% endif %}
{% endif %}
    if (is_on != ({{ is_on }})) begin
      is_on = !is_on;
      if (!is_on) lose_outputs(2);
{% if not holds %}
      else if (clk_level === {{ resting }}) power_up;
{% endif %}
    end
  end
