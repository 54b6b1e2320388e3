
  // -- Delay over overdrive ---------------------------------------------------------------------
  // A curve over ln(overdrive) through nodes. Below the first node a straight line with slope
  // -tau, which is linear regeneration; between nodes cubics whose slopes at the nodes are those
  // of the parabola through three neighbours, kept falling; from the last node on constant.
  // A segment is built when an overdrive needs it under the present conditions.

  localparam int LAST = {{ nodes[-1].number }};    // node
  real gap[1:LAST];            // ln of the overdrive at a node over that at the node before
  bit [LAST+1:0] segment_known = '0;
  // Segment k ends at node k: delay = cubic_0 + x (cubic_1 + x (cubic_2 + x cubic_3))
  real cubic_0[0:LAST+1], cubic_1[0:LAST+1], cubic_2[0:LAST+1], cubic_3[0:LAST+1];
  real x_ln = 0.0;             // ln of the overdrive over that at the start of its segment

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
      if (!segment_known[{{ node.number + 1 }}]) build_segment({{ node.number + 1 }});
      delay_s = cubic_0[{{ node.number + 1 }}];
{% else %}
    end else if (magnitude_v >= {{ node.volts }}) begin
      if (!segment_known[{{ node.number + 1 }}]) build_segment({{ node.number + 1 }});
      x_ln = $ln(magnitude_v / {{ node.volts }});
      delay_s = cubic_0[{{ node.number + 1 }}]
          + x_ln * (cubic_1[{{ node.number + 1 }}] + x_ln * (cubic_2[{{ node.number + 1 }}] + x_ln * cubic_3[{{ node.number + 1 }}]));
{% endif %}
{% endfor %}
    end else begin
      if (magnitude_v < FLOOR_V) magnitude_v = FLOOR_V;
      if (!segment_known[0]) build_segment(0);
      delay_s = cubic_0[0] + $ln(magnitude_v / {{ nodes[0].volts }}) * cubic_1[0];
    end
    if (delay_s < TICK_S) delay_s = TICK_S;
  endtask

  task build_segment(input int k);
    real first, last, chord, chord_before, chord_after, slope_first, slope_last;
    first = node_delay(k == 0 ? 0 : k - 1);
    cubic_0[k] = first;
    if (k == 0) begin
      cubic_1[k] = -{{ curve.tau_s }};
    end else if (k <= LAST) begin
      last = node_delay(k);
      chord = (last - first) / gap[k];
      if (k == 1) begin
        chord_before = chord;
        slope_first = -{{ curve.tau_s }};
      end else begin
        chord_before = (first - node_delay(k - 2)) / gap[k-1];
        slope_first = (gap[k] * chord_before + gap[k-1] * chord) / (gap[k] + gap[k-1]);
      end
      if (k == LAST) begin
        chord_after = chord;
{% if nodes | length == 2 %}
        slope_last = 2.0 * chord - slope_first;
{% else %}
        slope_last = chord + gap[k] * (chord - chord_before) / (gap[k] + gap[k-1]);
{% endif %}
      end else begin
        chord_after = (node_delay(k + 1) - last) / gap[k+1];
        slope_last = (gap[k+1] * chord + gap[k] * chord_after) / (gap[k+1] + gap[k]);
      end
      slope_first = falling(slope_first, chord_before, chord);
      slope_last = falling(slope_last, chord, chord_after);
      cubic_1[k] = slope_first;
      cubic_3[k] = (slope_first + slope_last - 2.0 * chord) / (gap[k] * gap[k]);
      cubic_2[k] = (chord - slope_first) / gap[k] - cubic_3[k] * gap[k];
    end
    segment_known[k] = 1'b1;
  endtask

  // A slope that lets the curve fall wherever its nodes do
  function automatic real falling(input real slope, input real chord_1, input real chord_2);
    real steepest;
    steepest = 3.0 * (chord_1 > chord_2 ? chord_1 : chord_2);
    return slope < steepest ? steepest : slope > 0.0 ? 0.0 : slope;
  endfunction

  function automatic real node_delay(input int node);
    case (node)
{% for node_s in curve.node_s %}
      {{ "default" if loop.last else loop.index0 }}: return {{ node_s }};
{% endfor %}
    endcase
  endfunction
