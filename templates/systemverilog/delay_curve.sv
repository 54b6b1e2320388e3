
  // -- Delay over overdrive ---------------------------------------------------------------------
  // Below the first node a straight line in ln(overdrive) with slope -tau: linear regeneration.
  // Between nodes a cubic in ln(overdrive) whose slopes at the nodes are those of the parabola
  // through three neighbours, kept falling. From the last node on constant.
  // Nodes and segments are evaluated when an overdrive needs them under the present conditions.

  localparam int LAST = {{ nodes[-1].number }};          // node
  real node_ln_v[0:LAST];        // ln of the overdrive at each node
  real gap[1:LAST];              // its distance from the node before
  real delay_at[0:LAST];         // delay at each node in s
  bit [LAST:0] node_known = '0;

  // Segment k ends at node k: delay = sum of cubic_n (ln(overdrive) - ln(overdrive at its start))^n
  int segment = 0;
  real start_ln_v[0:LAST+1];
  real cubic_0[0:LAST+1], cubic_1[0:LAST+1], cubic_2[0:LAST+1], cubic_3[0:LAST+1];
  bit [LAST+1:0] segment_known = '0;
  real from_start = 0.0;

  task lay_out_curve;
    real node_v;
    for (int node = 0; node <= LAST; node = node + 1) begin
      case (node)
{% for node in nodes %}
        {{ "default" if loop.last else node.number }}: node_v = {{ node.volts }};
{% endfor %}
      endcase
      node_ln_v[node] = $ln(node_v);
      if (node > 0) gap[node] = node_ln_v[node] - node_ln_v[node-1];
    end
  endtask

  task find_delay;
{% for node in nodes | reverse %}
    {{ "if" if loop.first else "else if" }} (magnitude_v >= {{ node.volts }}) segment = {{ node.number + 1 }};
{% endfor %}
    else segment = 0;
    if (!segment_known[segment]) build_segment;
    from_start = $ln(magnitude_v) - start_ln_v[segment];
    delay_s = cubic_0[segment] + from_start * (cubic_1[segment]
        + from_start * (cubic_2[segment] + from_start * cubic_3[segment]));
  endtask

  task build_segment;
    int first;
    real chord, width;
    first = segment == 0 ? 0 : segment - 1;
    start_ln_v[segment] = node_ln_v[first];
    cubic_0[segment] = node_delay(first);
    cubic_1[segment] = segment > LAST ? 0.0 : node_slope(first);
    cubic_2[segment] = 0.0;
    cubic_3[segment] = 0.0;
    if (segment > 0 && segment <= LAST) begin
      width = gap[segment];
      chord = chord_slope(segment);
      cubic_3[segment] = (cubic_1[segment] + node_slope(segment) - 2.0 * chord) / (width * width);
      cubic_2[segment] = (chord - cubic_1[segment]) / width - cubic_3[segment] * width;
    end
    segment_known[segment] = 1'b1;
  endtask

  function real node_slope(input int node);
    real below, above, slope, flattest;
    if (node == 0) begin
      flattest = chord_slope(1);
      slope = -{{ curve.tau_s }};
    end else if (node == LAST) begin
      flattest = chord_slope(LAST);
{% if nodes | length == 2 %}
      slope = 2.0 * flattest + {{ curve.tau_s }};
{% else %}
      slope = flattest + gap[LAST] * (flattest - chord_slope(LAST - 1)) / (gap[LAST] + gap[LAST-1]);
{% endif %}
    end else begin
      below = chord_slope(node);
      above = chord_slope(node + 1);
      flattest = below > above ? below : above;
      slope = (gap[node+1] * below + gap[node] * above) / (gap[node+1] + gap[node]);
    end
    if (slope < 3.0 * flattest) slope = 3.0 * flattest;
    return slope < 0.0 ? slope : 0.0;
  endfunction

  // Slope of the straight line from the node before
  function real chord_slope(input int node);
    return (node_delay(node) - node_delay(node - 1)) / gap[node];
  endfunction

  function real node_delay(input int node);
    if (!node_known[node]) begin
      case (node)
{% for node_s in curve.node_s %}
        {{ "default" if loop.last else loop.index0 }}: delay_at[node] = {{ node_s }};
{% endfor %}
      endcase
      node_known[node] = 1'b1;
    end
    return delay_at[node];
  endfunction
