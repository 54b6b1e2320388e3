
  // -- Reset ------------------------------------------------------------------------------------

  // With the supply on and the clock at its reset level, but no decision before
  task power_up;
    return_ticks = 1.0;
    return_time = $realtime + return_ticks;
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

  // By a decision edge, unless the reset state is due at this very moment
  task cancel_return;
    if ($realtime + 0.5 <= return_time) begin
      returning = 1'b0;
      disable reset_when_due;
    end
  endtask
