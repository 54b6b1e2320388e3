      reset_time = $realtime;
{% if holds %}
      if (decision_state != DECIDED) end_undecided;
{% else %}
      return_ticks = {{ "reset_ticks" if reset else "0.0" }};
      if (decision_state != DECIDED) end_undecided;
      returning = 1'b1;
      fork : return_when_due
        begin
          #(return_ticks);
          if (void_waits == 0) begin  // take_reset_state, without the cost of its call
{% filter indent(8, first=true) %}
{% include "systemverilog/reset_state.sv" %}
{% endfilter %}
          end else if (returning && is_due(reset_time + return_ticks)) take_reset_state;
          else void_waits = void_waits - 1;
        end
      join_none
{% endif %}
