
  // -- Outputs ----------------------------------------------------------------------------------

  always begin : ready
    wait (phase == DECIDING);
    #(delay_ticks);
    show_decision;
  end

  task show_decision;
    begin
      phase = DECIDED;
{% for output, value in shown_outputs %}
      {{ output }} = {{ value }};
{% endfor %}
{% if unresolved %}
      {{ unresolved }} = 1'b0;
{% endif %}
      x_cause = 0;
    end
  endtask

  // At a clean step of the clock back to its reset level; what is ready just then is shown first
  task end_phase;
    begin
      if (phase == DECIDING && (DELAY_ON == 0 || $realtime - edge_time >= delay_ticks)) begin
        show_decision;
        disable ready;
      end
{% if not holds %}
      if (phase == IDLE) return_ticks = 1;
      else return_ticks = {{ reset_ticks }};
{% endif %}
      if (phase == DECIDING || phase == FORCED) begin
        leave_unresolved;
{% if not holds %}
        if (return_ticks < 1) return_ticks = 1;
{% endif %}
      end
{% if holds %}
{% elif can_be_off %}
      if (on) return_to_reset(return_ticks);
{% else %}
      return_to_reset(return_ticks);
{% endif %}
    end
  endtask

  task leave_unresolved;
    begin
      phase = IDLE;
      disable ready;
{% if unresolved %}
      {{ unresolved }} = 1'b1;
{% endif %}
      x_cause = 1;
      if (UNRESOLVED_MODE == 0) begin
{% for output in outputs %}
        {{ output }} = 1'bx;
{% endfor %}
      end else if (UNRESOLVED_MODE == 1) begin
        {{ outp }} = draw(coin_key, decision_count) >> 63 != 64'd0;
{% if outn %}
        {{ outn }} = !{{ outp }};
{% endif %}
      end
    end
  endtask

  // The outputs are unknown at once, until the {{ "next ready" if holds else "reset state returns" }}
  task lose_outputs(input int cause);
    begin
      phase = IDLE;
      disable ready;
{% if not holds %}
      returning = 1'b0;
      disable reset_return;
{% endif %}
{% for output in outputs %}
      {{ output }} = 1'bx;
{% endfor %}
      x_cause = cause;
    end
  endtask
{% if not holds %}

  // -- Reset ------------------------------------------------------------------------------------

  task return_to_reset(input longint ticks);
    begin
      return_time = $realtime + ticks;
      return_ticks = ticks;
      if (ticks == 0) show_reset;
      else returning = 1'b1;
    end
  endtask

  always begin : reset_return
    wait (returning);
    #(return_ticks);
    show_reset;
  end

  task show_reset;
    begin
      returning = 1'b0;
{% for output in outputs %}
      {{ output }} = {{ reset_level }};
{% endfor %}
      x_cause = 0;
    end
  endtask

  // A decision edge cancels the reset state that has not yet returned
  task cancel_return;
    begin
      if ($realtime >= return_time) show_reset;
      returning = 1'b0;
      disable reset_return;
    end
  endtask
{% endif %}
