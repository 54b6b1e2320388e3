
  // -- Decision: at a clean step of the clock to its deciding level -----------------------------

{% if noise %}
  localparam real CERTAIN_SIGMAS = 8.3;  // no draw reaches it, so that none is made beyond
{% endif %}
{% if delay %}
  localparam real FLOOR_V = {{ floor_v }};  // overdrives below are not distinguished
{% endif %}
{% if common_mode.matters %}
  real vcm_steps = 0.0;      // common mode in steps, and half a step to round it
{% endif %}
  real vdiff_v = 0.0;
{% if noise or delay %}
  real magnitude_v = 0.0;    // of the overdrive
{% endif %}

  task decide;
{% if not holds %}
    if (returning) cancel_return;
{% endif %}
    decision_count = decision_count + 64'd1;
    vdiff_v = {{ pins.inp }} - {{ pins.inn }};
{% if is_on %}
    if (is_on) begin
      if (vdiff_v - vdiff_v == 0.0) weigh;
      else lose_input;
    end
{% else %}
    if (vdiff_v - vdiff_v == 0.0) weigh;
    else lose_input;
{% endif %}
  endtask

  task weigh;
    edge_time = $realtime;
{% if pins.vdd and supply.matters %}
    if ({{ pins.vdd }} != vdd_seen) fold_supply;
{% endif %}
{% if common_mode.matters %}
    vcm_steps = ({{ pins.inp }} + {{ pins.inn }}) * (0.5 * STEPS_PER_V) + 0.5;
    if (!(vcm_steps >= vcm_step && vcm_steps < vcm_step + 1.0)) fold_common_mode;
{% endif %}
    overdrive_v = {{ overdrive }};
{% if noise or delay %}
    magnitude_v = overdrive_v < 0.0 ? -overdrive_v : overdrive_v;
{% endif %}
{% if noise %}
    if (magnitude_v < noise_reach_v) begin
      overdrive_v = overdrive_v + sigma_v * standard_normal(random_bits(noise_key, decision_count));
      magnitude_v = overdrive_v < 0.0 ? -overdrive_v : overdrive_v;
    end
{% endif %}
    leaning = overdrive_v > 0.0;
{% if delay %}
    if (DELAY_ON != 0) begin
      if (magnitude_v < FLOOR_V) magnitude_v = FLOOR_V;
      find_delay;
      delay_ticks = longint'(delay_s * TICKS_PER_S);
      if (delay_ticks < 64'sd1) delay_ticks = 64'sd1;
    end
{% endif %}
    decision_state = DECIDING;
    if (FORCE_UNRESOLVED_EVERY > 0) begin
      if (decision_count % {32'd0, FORCE_UNRESOLVED_EVERY} == 64'd0) decision_state = FORCED;
    end
  endtask

  // The input is infinite or not a number
  task lose_input;
    lose_outputs(3);
    input_warnings = input_warnings + 1;
    if (input_warnings == 1) begin
      warn($sformatf("the input is not a number: %g V and %g V", {{ pins.inp }}, {{ pins.inn }}));
    end
  endtask
{% if delay == "logarithm" %}

  task find_delay;
    delay_s = node_s;
    if (magnitude_v < {{ nodes[0].volts }}) begin
      delay_s = node_s + tau_s * $ln({{ nodes[0].volts }} / magnitude_v);
    end
  endtask
{% endif %}
