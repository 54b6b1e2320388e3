    decision_state = DECIDED;
{% if pins.outn %}
    if (overdrive_v > 0.0) begin
      {{ pins.outp }} = 1'b1;
      {{ pins.outn }} = 1'b0;
    end else begin
      {{ pins.outp }} = 1'b0;
      {{ pins.outn }} = 1'b1;
    end
{% else %}
    {{ pins.outp }} = overdrive_v > 0.0;
{% endif %}
{% if pins.unresolved %}
    {{ pins.unresolved }} = 1'b0;
{% endif %}
    x_cause = 0;
{% if energy_over_overdrive %}
    energy_j = energy_j + energy_fixed_j;
    if (magnitude_v < HIGH_V) begin
      energy_j = energy_j + energy_rise * $ln(HIGH_V / (magnitude_v < LOW_V ? LOW_V : magnitude_v));
    end
{% elif energy %}
    energy_j = energy_j + ({{ energy.shown }});
{% endif %}
