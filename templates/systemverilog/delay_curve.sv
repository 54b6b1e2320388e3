
  // -- Delay over overdrive ---------------------------------------------------------------------
  // Below the first node a straight line in ln(overdrive) with slope -tau: linear regeneration.
  // Between nodes a cubic in ln(overdrive) whose slopes are those of the parabola through three
  // neighbours, kept falling. Above the last node constant.

  localparam int LAST = {{ last_node }};
  localparam real FLOOR_V = {{ floor_v }};  // overdrives below are not distinguished
  real node_ln_v[0:LAST];  // ln of the nodes' overdrives
{% for line in node_declarations %}
  {{ line }}
{% endfor %}
  real node_s[0:LAST];     // delays at the nodes under the present conditions, as far as known
  bit [LAST:0] node_known = {{ node_bits }}'d0;

  // Segment k ends at node k; it is known once it was needed under the present conditions.
  int segment;
  real start_ln_v[0:LAST+1];
  real delay_0[0:LAST+1], delay_1[0:LAST+1], delay_2[0:LAST+1], delay_3[0:LAST+1];
  bit [LAST+1:0] segment_known = {{ node_bits + 1 }}'d0;
  real from_start;

  task find_delay;
    begin
{% for node in nodes | reverse %}
      {{ "if" if loop.first else "else if" }} (magnitude_v >= {{ node.volts }}) segment = {{ node.number + 1 }};
{% endfor %}
      else segment = 0;
      if (!segment_known[segment]) build_segment;
      from_start = $ln(magnitude_v) - start_ln_v[segment];
      delay_s = delay_0[segment] + from_start * (delay_1[segment]
          + from_start * (delay_2[segment] + from_start * delay_3[segment]));
    end
  endtask

  task build_segment;
    int first;
    real width, secant;
    begin
      first = segment == 0 ? 0 : segment - 1;
      start_ln_v[segment] = node_ln_v[first];
      delay_0[segment] = node_delay(first);
      delay_1[segment] = segment > LAST ? 0.0 : node_slope(first);
      delay_2[segment] = 0.0;
      delay_3[segment] = 0.0;
      if (segment > 0 && segment <= LAST) begin
        width = node_ln_v[segment] - node_ln_v[first];
        secant = (node_delay(segment) - node_delay(first)) / width;
        delay_3[segment] = (delay_1[segment] + node_slope(segment) - 2.0 * secant) / (width * width);
        delay_2[segment] = (secant - delay_1[segment]) / width - delay_3[segment] * width;
      end
      segment_known[segment] = 1'b1;
    end
  endtask

  function real node_delay(input int node);
    begin
      if (!node_known[node]) begin
        node_s[node] = $exp({{ node_polynomial }});
        node_known[node] = 1'b1;
      end
      node_delay = node_s[node];
    end
  endfunction

  function real node_slope(input int node);
    real width_below, width_above, below, above, flattest, slope;
    begin
      if (node > 0) begin
        width_below = node_ln_v[node] - node_ln_v[node-1];
        below = (node_delay(node) - node_delay(node - 1)) / width_below;
      end
      ...
    end
  endfunction
