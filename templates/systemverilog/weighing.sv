    overdrive_v = {{ overdrive }};
{% if noise or delay or energy_over_overdrive %}
    magnitude_v = overdrive_v < 0.0 ? -overdrive_v : overdrive_v;
{% endif %}
{% if noise %}
    if (magnitude_v < {{ "WIDEST_REACH_V" if noise.sigma_v else "noise_reach_v" }}) add_noise;
{% endif %}
{% if delay == "curve" %}
    if (DELAY_ON != 0) begin
{% for node in nodes | reverse %}
{% if loop.first %}
      if (magnitude_v >= {{ node.volts }}) begin
        delay_s = {{ curve.node_s[node.number] }};
{% else %}
      end else if (magnitude_v >= {{ node.volts }}) begin
        if (!segment_known[{{ node.next }}]) build_segment_{{ node.next }};
        x_ln = $ln(magnitude_v / {{ node.volts }});
        delay_s = cubic_0[{{ node.next }}]
            + x_ln * (cubic_1[{{ node.next }}] + x_ln * (cubic_2[{{ node.next }}] + x_ln * cubic_3[{{ node.next }}]));
{% endif %}
{% endfor %}
      end else begin
        if (!segment_known[TAIL]) build_tail;
        x_ln = $ln((magnitude_v < FLOOR_V ? FLOOR_V : magnitude_v) / {{ nodes[0].volts }});
        delay_s = first_s - tau_s * x_ln;
      end
      delay_ticks = (delay_s * TICKS_PER_S + ROUND) - ROUND;
      if (delay_ticks < {{ least_ticks }}) delay_ticks = {{ least_ticks }};
    end
{% elif delay %}
    if (DELAY_ON != 0) begin
      delay_s = node_s;
      if (magnitude_v < FLOOR_V) delay_s = node_s + tau_s * $ln({{ nodes[0].volts }} / FLOOR_V);
      else if (magnitude_v < {{ nodes[0].volts }}) delay_s = node_s + tau_s * $ln({{ nodes[0].volts }} / magnitude_v);
      delay_ticks = (delay_s * TICKS_PER_S + ROUND) - ROUND;
      if (delay_ticks < {{ least_ticks }}) delay_ticks = {{ least_ticks }};
    end
{% endif %}
{% if aperture %}
    if (!(magnitude_v <= LARGEST_V)) begin  // an input is infinite or not a number
      decision_state = IDLE;
      lose_input;
    end else if (FORCE_UNRESOLVED_EVERY > 0 ? is_forced(decision_count) : 1'b0) begin
      decision_state = FORCED;
    end else begin
      decision_state = DECIDING;
      #(delay_ticks - aperture_ticks);
      if (void_waits == 0) begin  // show_decision, without the cost of its call
{% filter indent(4, first=true) %}
{% include "systemverilog/shown.sv" %}
{% endfilter %}
      end else if (is_meant(DECIDING, edge_time + delay_ticks)) show_decision;
      else void_waits = void_waits - 1;
    end
{% else %}
    decision_state = DECIDING;
    if (FORCE_UNRESOLVED_EVERY > 0 ? is_forced(decision_count) : 1'b0) begin
      decision_state = FORCED;
      void_waits = void_waits + 1;
    end
{% endif %}
