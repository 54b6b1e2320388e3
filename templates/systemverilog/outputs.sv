
  // -- Outputs ----------------------------------------------------------------------------------

  always begin : show_when_ready
    wait (decision_state == DECIDING);
    #(delay_s * TICKS_PER_S);
    show_decision;
  end

  task show_decision;
    decision_state = DECIDED;
    {{ pins.outp }} = overdrive_v > 0.0;
{% if pins.outn %}
    {{ pins.outn }} = !(overdrive_v > 0.0);
{% endif %}
{% if pins.unresolved %}
    {{ pins.unresolved }} = 1'b0;
{% endif %}
    x_cause = 0;
  endtask

  // At a clean step of the clock back to its reset level
  task end_phase;
{% if holds %}
    if (decision_state != DECIDED) end_undecided;
{% else %}
    if (decision_state == DECIDED) return_ticks = {{ "reset_ticks" if reset else "0.0" }};
    else end_undecided;
    return_time = $realtime + return_ticks;
    returning = 1'b1;
{% endif %}
  endtask

  task end_undecided;
{% if not holds %}
    return_ticks = 1.0;  // as at power-up if there was nothing to decide
{% endif %}
    if (decision_state == DECIDING && (DELAY_ON == 0 || ready_by($realtime))) begin
      show_decision;
      disable show_when_ready;
{% if not holds %}
      return_ticks = {{ "reset_ticks" if reset else "0.0" }};
{% endif %}
    end else if (decision_state != IDLE) begin
      leave_unresolved;
{% if reset %}
      if (reset_ticks > 1.0) return_ticks = reset_ticks;
{% endif %}
    end
  endtask

  // Times are rounded to whole ticks
  function automatic bit ready_by(input real now);
    return edge_time + delay_s * TICKS_PER_S < now + 0.5;
  endfunction

  task leave_unresolved;
    decision_state = IDLE;
    disable show_when_ready;
{% if pins.unresolved %}
    {{ pins.unresolved }} = 1'b1;
{% endif %}
    x_cause = 1;
    if (UNRESOLVED_MODE == 0) begin
{% for output in outputs %}
      {{ output }} = 1'bx;
{% endfor %}
    end else if (UNRESOLVED_MODE == 1) begin
      {{ pins.outp }} = random_bits(coin_key, decision_count) >> 63 != 64'd0;
{% if pins.outn %}
      {{ pins.outn }} = !{{ pins.outp }};
{% endif %}
    end
  endtask

  // The outputs are unknown at once, whatever was on its way
  task lose_outputs(input int cause);
    decision_state = IDLE;
    disable show_when_ready;
{% if not holds %}
    returning = 1'b0;
    disable reset_when_due;
{% endif %}
{% for output in outputs %}
    {{ output }} = 1'bx;
{% endfor %}
    x_cause = cause;
  endtask
