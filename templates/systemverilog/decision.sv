
  // -- Decision: at a clean step of the clock to its deciding level -----------------------------

{% if delay %}
  localparam real FLOOR_V = {{ floor_v }};  // overdrives below are not distinguished
{% endif %}
{% if noise or delay %}
  real magnitude_v = 0.0;           // of the overdrive
{% endif %}

  task decide;
    edge_time = $realtime;
{% if common_mode.matters %}
    vcm_steps = ({{ pins.inp }} + {{ pins.inn }}) * (0.5 * STEPS_PER_V) + 0.5;
    if (!(vcm_steps >= vcm_step && vcm_steps < vcm_step_end)) begin
      if (vcm_steps - vcm_steps != 0.0) begin  // it is infinite or not a number
        lose_input;
        disable decide;
      end
{% if supply.matters and not fixed_supply %}
      if (vdd_changed) fold_supply;
{% endif %}
      fold_common_mode;
    end
{% else %}
    if (({{ pins.inp }} - {{ pins.inp }}) + ({{ pins.inn }} - {{ pins.inn }}) != 0.0) begin
      lose_input;  // it is infinite or not a number
      disable decide;
    end
{% if supply.matters and not fixed_supply %}
    if (vdd_changed) fold_supply;
{% endif %}
{% endif %}
    overdrive_v = {{ overdrive }};
{% if noise or delay %}
    magnitude_v = overdrive_v < 0.0 ? -overdrive_v : overdrive_v;
{% endif %}
{% if noise %}
    if (magnitude_v < noise_reach_v) add_noise;
{% endif %}
{% if delay %}
    if (DELAY_ON != 0) find_delay;
{% endif %}
    decision_state = DECIDING;
    if (FORCE_UNRESOLVED_EVERY > 0) begin
      if (decision_count % {32'd0, FORCE_UNRESOLVED_EVERY} == 64'd0) decision_state = FORCED;
    end
  endtask

  task lose_input;
    lose_outputs(3);
    input_warnings = input_warnings + 1;
    if (input_warnings == 1) begin
      warn($sformatf("the input is not a number: %g V and %g V", {{ pins.inp }}, {{ pins.inn }}));
    end
  endtask
{% if noise %}

  task add_noise;
{% if sigma_on_demand %}
    if (!sigma_known) begin
      sigma_v = exact_exp(noise_ln);
      noise_reach_v = CERTAIN_SIGMAS * sigma_v;
      sigma_known = 1'b1;
    end
    if (magnitude_v < noise_reach_v) begin
      overdrive_v = overdrive_v + sigma_v * standard_normal(random_bits(noise_key, decision_count));
      magnitude_v = overdrive_v < 0.0 ? -overdrive_v : overdrive_v;
    end
{% else %}
    overdrive_v = overdrive_v + sigma_v * standard_normal(random_bits(noise_key, decision_count));
    magnitude_v = overdrive_v < 0.0 ? -overdrive_v : overdrive_v;
{% endif %}
  endtask
{% endif %}
{% if delay == "logarithm" %}

  // Linear regeneration; from the largest characterised overdrive on constant
  task find_delay;
    delay_s = node_s;
    if (magnitude_v < FLOOR_V) magnitude_v = FLOOR_V;
    if (magnitude_v < {{ nodes[0].volts }}) delay_s = node_s + tau_s * $ln({{ nodes[0].volts }} / magnitude_v);
    if (delay_s < TICK_S) delay_s = TICK_S;
  endtask
{% endif %}
