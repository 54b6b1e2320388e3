      edge_time = $realtime;
{% if not holds %}
      if (returning) begin
        call_off_return;
        if (is_due(reset_time + return_ticks)) take_reset_state;
      end
{% endif %}
{% if common_mode.matters %}
      vcm_steps = ({{ pins.inp }} + {{ pins.inn }}) * (0.5 * STEPS_PER_V) + 0.5;
      if (vcm_steps < vcm_step) take_conditions;
      else if (!(vcm_steps < vcm_step_end)) take_conditions;  // or it is not a number
{% else %}
      input_lost = ({{ pins.inp }} - {{ pins.inp }}) + ({{ pins.inn }} - {{ pins.inn }}) != 0.0;
      if (input_lost) lose_input;
{% if supply.matters and not fixed_supply %}
      else if (vdd_changed) fold_supply;
{% endif %}
{% endif %}
      if (!input_lost) begin
{% if memory %}
        memory_v = 0.0;
        if (MEMORY_ON != 0 ? decision_state == DECIDED : 1'b0) begin
          if (edge_time - reset_time != shift_ticks) find_shift;
          memory_v = overdrive_v > 0.0 ? -shift_v : shift_v;
        end
{% endif %}
{% if aperture %}
        decision_state = SAMPLING;
        fork : decide_when_sampled
          begin
            #(aperture_ticks);
            if (void_waits == 0) decide;
            else if (is_meant(SAMPLING, edge_time + aperture_ticks)) decide;
            else void_waits = void_waits - 1;
          end
        join_none
{% else %}
        decide;
        fork : show_when_ready
          begin
            #(delay_ticks);
            if (void_waits == 0) show_decision;
            else if (is_meant(DECIDING, edge_time + delay_ticks)) show_decision;
            else void_waits = void_waits - 1;
          end
        join_none
{% endif %}
      end
