
  // -- Delay over overdrive ---------------------------------------------------------------------
  // A curve over ln(overdrive) through nodes. Below the first node a straight line with slope
  // -tau, which is linear regeneration; between nodes cubics whose slopes at the nodes are those
  // of the parabola through three neighbours; from the last node on constant.
  // What an overdrive needs of it is built when it is first needed under the present conditions.

  localparam int LAST = {{ nodes[-1].number }};      // node
  real gap[1:LAST];             // ln of the overdrive at a node over that at the node before
  // Segment k ends at node k: delay = cubic_0 + x (cubic_1 + x (cubic_2 + x cubic_3))
  real cubic_0[1:LAST], cubic_1[1:LAST], cubic_2[1:LAST], cubic_3[1:LAST];
  bit [LAST:1] segment_known = '0;
  real first_s = 0.0;           // delay at the first node
  real tau_s = 0.0;             // regeneration time constant
  bit tail_known = 1'b0;
  real x_ln = 0.0;              // ln of an overdrive over that at the start of its segment

  task lay_out_curve;
    for (int node = 1; node <= LAST; node = node + 1) begin
      case (node)
{% for node in nodes[1:] %}
        {{ "default" if loop.last else node.number }}: gap[node] = $ln({{ node.volts }} / {{ nodes[loop.index0].volts }});
{% endfor %}
      endcase
    end
  endtask

  task find_delay;
{% for node in nodes | reverse %}
{% if loop.first %}
    if (magnitude_v >= {{ node.volts }}) begin
      delay_s = node_delay(LAST);
{% else %}
    end else if (magnitude_v >= {{ node.volts }}) begin
      if (!segment_known[{{ node.next }}]) build_segment({{ node.next }});
      x_ln = $ln(magnitude_v / {{ node.volts }});
      delay_s = cubic_0[{{ node.next }}] + x_ln * (cubic_1[{{ node.next }}] + x_ln * (cubic_2[{{ node.next }}] + x_ln * cubic_3[{{ node.next }}]));
{% endif %}
{% endfor %}
    end else begin
      if (magnitude_v < FLOOR_V) magnitude_v = FLOOR_V;
      if (!tail_known) build_tail;
      delay_s = first_s - tau_s * $ln(magnitude_v / {{ nodes[0].volts }});
    end
    if (delay_s < TICK_S) delay_s = TICK_S;
  endtask

  task build_tail;
    first_s = node_delay(0);
    tau_s = regeneration_tau();
    tail_known = 1'b1;
  endtask

  task build_segment(input int k);
    real width, first, last, chord, chord_before, chord_after;
    real slope_first, slope_last, steepest, bend;
{% if nodes | length > 2 %}
    real width_before, width_after;
{% endif %}
    width = gap[k];
    first = node_delay(k - 1);
    last = node_delay(k);
    chord = (last - first) / width;
    chord_before = chord;
    chord_after = chord;
{% if nodes | length == 2 %}
    slope_first = -regeneration_tau();
    slope_last = 2.0 * chord - slope_first;
{% else %}
    if (k == 1) begin
      slope_first = -regeneration_tau();
    end else begin
      width_before = gap[k-1];
      chord_before = (first - node_delay(k - 2)) / width_before;
      slope_first = (width * chord_before + width_before * chord) / (width + width_before);
    end
    if (k == LAST) begin
      slope_last = chord + width * (chord - chord_before) / (width + width_before);
    end else begin
      width_after = gap[k+1];
      chord_after = (node_delay(k + 1) - last) / width_after;
      slope_last = (width_after * chord + width * chord_after) / (width_after + width);
    end
{% endif %}
    // Limited, so that the curve falls wherever its nodes do
    steepest = 3.0 * (chord_before > chord ? chord_before : chord);
    if (slope_first < steepest) slope_first = steepest;
    if (slope_first > 0.0) slope_first = 0.0;
    steepest = 3.0 * (chord_after > chord ? chord_after : chord);
    if (slope_last < steepest) slope_last = steepest;
    if (slope_last > 0.0) slope_last = 0.0;
    bend = (slope_first + slope_last - 2.0 * chord) / width;
    cubic_0[k] = first;
    cubic_1[k] = slope_first;
    cubic_2[k] = (chord - slope_first) / width - bend;
    cubic_3[k] = bend / width;
    segment_known[k] = 1'b1;
  endtask

  function real regeneration_tau();
    return {{ curve.tau_s }};
  endfunction

  function real node_delay(input int node);
    case (node)
{% for node in nodes | reverse %}
      {{ "default" if loop.last else node.number }}: return {{ curve.node_s[node.number] }};
{% endfor %}
    endcase
  endfunction
