
  // -- Supply and enable ------------------------------------------------------------------------

{% if supply_off %}
  localparam real SUPPLY_OFF_V = {{ supply_off }};
{% endif %}

  always @({{ off_events }}) begin
    if (on != ({{ is_on }})) begin
      on = !on;
      if (!on) lose_outputs(2);
{% if not holds %}
      else if (clk_level === {{ resting }}) return_to_reset(1);
{% endif %}
    end
  end
