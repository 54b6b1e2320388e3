
  // -- Decision: at a clean step of the clock to its deciding level -----------------------------

{% if noise %}
  localparam real CERTAIN_SIGMAS = 8.3;  // no draw reaches it, so that noise is not drawn beyond
{% endif %}
  real vdiff_v;
{% if common_mode %}
  real vcm_steps;  // common mode in steps, plus a half to round it
{% endif %}
{% if delay %}
  real magnitude_v;
{% elif noise %}
  real magnitude_v;
{% endif %}

  task decide;
    begin
{% if not holds %}
      if (returning) cancel_return;
{% endif %}
      decision_count = decision_count + 64'd1;
{% if can_be_off %}
      if (on) begin
        vdiff_v = {{ inp }} - {{ inn }};
        if (vdiff_v - vdiff_v == 0.0) weigh_input;
        else lose_input;  // it is infinite or not a number
      end
{% else %}
      vdiff_v = {{ inp }} - {{ inn }};
      if (vdiff_v - vdiff_v == 0.0) weigh_input;
      else lose_input;  // it is infinite or not a number
{% endif %}
    end
  endtask

  task weigh_input;
    begin
      edge_time = $realtime;
{% if supply %}
      if ({{ vdd }} != vdd_seen) fold_supply;
{% endif %}
{% if common_mode %}
      vcm_steps = ({{ inp }} + {{ inn }}) * {{ half_voltage_steps }} + 0.5;
      if (!(vcm_steps >= vcm_step && vcm_steps < vcm_step + 1.0)) fold_common_mode;
{% endif %}
      overdrive_v = {{ effective_overdrive }};
{% if noise or delay %}
      magnitude_v = overdrive_v < 0.0 ? -overdrive_v : overdrive_v;
{% endif %}
{% if noise %}
      if (magnitude_v < noise_reach_v) add_noise;
{% endif %}
      leaning = overdrive_v > 0.0;
{% if delay %}
      if (DELAY_ON != 0) begin
        if (magnitude_v < FLOOR_V) magnitude_v = FLOOR_V;
{% if delay == "curve" %}
        find_delay;
{% else %}
        delay_s = {{ node_s }};
        if (magnitude_v < {{ node_v }}) delay_s = {{ tail }};
{% endif %}
        delay_ticks = delay_s * TICKS_PER_S;
        if (delay_ticks < 1) delay_ticks = 1;
      end
{% endif %}
      phase = DECIDING;
      if (FORCE_UNRESOLVED_EVERY > 0) begin
        if (decision_count % 64'(FORCE_UNRESOLVED_EVERY) == 64'd0) phase = FORCED;
      end
    end
  endtask
{% if noise %}

  task add_noise;
    begin
      overdrive_v = overdrive_v + {{ sigma_v }} * standard_normal(draw(noise_key, decision_count));
      magnitude_v = overdrive_v < 0.0 ? -overdrive_v : overdrive_v;
    end
  endtask
{% endif %}

  task lose_input;
    begin
      lose_outputs(3);
      input_warnings = input_warnings + 1;
      if (input_warnings == 1) begin
        warn($sformatf("input is not a number: {{ inp }} %g V, {{ inn }} %g V", {{ inp }}, {{ inn }}));
      end
    end
  endtask
