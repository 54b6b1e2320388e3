
  // -- Reset ------------------------------------------------------------------------------------

  // With the supply on, the clock at its reset level and no decision before
  task power_up;
    return_to_reset(1.0);
  endtask

  task return_to_reset(input real ticks);
    return_ticks = ticks;
    return_time = $realtime + ticks;
    returning = 1'b1;
  endtask

  always begin : reset_when_due
    wait (returning);
    #(return_ticks);
    returning = 1'b0;
{% for output in outputs %}
    {{ output }} = {{ reset_level }};
{% endfor %}
    x_cause = 0;
  end

  // By a decision edge, unless it is due at this very moment
  task cancel_return;
    if ($realtime < return_time) begin
      returning = 1'b0;
      disable reset_when_due;
    end
  endtask
