
  // -- Outputs ----------------------------------------------------------------------------------

  always begin : ready
    wait (phase == DECIDING);
    #(delay_ticks);
    show_decision;
  end

  task show_decision;
    begin
      phase = DECIDED;
      {{ outp }} = leaning;
{% if outn %}
      {{ outn }} = !leaning;
{% endif %}
{% if unresolved %}
      {{ unresolved }} = 1'b0;
{% endif %}
      x_cause = 0;
    end
  endtask

  // At a clean step of the clock back to its reset level. What is ready at this very moment is
  // shown first.
  task end_phase;
    begin
      if (phase == DECIDING && (DELAY_ON == 0 || $realtime - edge_time >= delay_ticks)) begin
        disable ready;
        show_decision;
      end
