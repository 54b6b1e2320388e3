
  // -- Reset ------------------------------------------------------------------------------------

  // With the supply on, the clock at its reset level and no decision before
  task power_up;
    return_to_reset(1.0);
  endtask

  task return_to_reset(input real ticks);
    if (ticks == 0.0) show_reset;
    else begin
      return_ticks = ticks;
      return_time = $realtime + ticks;
      returning = 1'b1;
    end
  endtask

  always begin : reset_when_due
    wait (returning);
    #(return_ticks);
    show_reset;
  end

  task show_reset;
    returning = 1'b0;
{% for output in outputs %}
    {{ output }} = {{ reset_level }};
{% endfor %}
    x_cause = 0;
  endtask

  // By a decision edge, unless the reset state is due at this very moment
  task cancel_return;
    if ($realtime >= return_time) show_reset;
    returning = 1'b0;
    disable reset_when_due;
  endtask
