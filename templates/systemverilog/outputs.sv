
  // -- Outputs ----------------------------------------------------------------------------------

  task show_decision;
{% include "systemverilog/shown.sv" %}
  endtask

  // At the end of a decision phase
  task end_undecided;
    if (decision_state == DECIDING && (DELAY_ON == 0 || is_due(edge_time + delay_ticks))) begin
      void_waits = void_waits + 1;
      show_decision;  // at this very moment
    end else if (decision_state != IDLE) begin
      leave_unresolved;
{% if not holds %}
      if (return_ticks < 1.0) return_ticks = 1.0;
    end else begin
      return_ticks = 1.0;  // as at power-up: there was nothing to decide
{% endif %}
    end
  endtask

  task leave_unresolved;
    call_off_decision;
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
{% if energy %}
    energy_j = energy_j + ({{ energy.unresolved }});
{% endif %}
  endtask

  // The outputs are unknown at once, whatever was on its way
  task lose_outputs(input int cause);
    call_off_decision;
{% if not holds %}
    call_off_return;
{% endif %}
{% for output in outputs %}
    {{ output }} = 1'bx;
{% endfor %}
    x_cause = cause;
  endtask

  task call_off_decision;
    if ({{ "decision_state == SAMPLING || " if aperture }}decision_state == DECIDING) void_waits = void_waits + 1;
    decision_state = IDLE;
  endtask
