
  // -- Reset ------------------------------------------------------------------------------------

  // With the supply on and the clock at its reset level, but no decision before
  task power_up;
    reset_time = $realtime;
    return_ticks = 1.0;
    returning = 1'b1;
    fork : return_after_power_up
      begin
        #(return_ticks);
        if (void_waits == 0) take_reset_state;
        else if (returning && is_due(reset_time + return_ticks)) take_reset_state;
        else void_waits = void_waits - 1;
      end
    join_none
  endtask

  task take_reset_state;
{% include "systemverilog/reset_state.sv" %}
  endtask

  task call_off_return;
    if (returning) void_waits = void_waits + 1;
    returning = 1'b0;
  endtask
