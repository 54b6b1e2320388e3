
  // -- Delay over overdrive ---------------------------------------------------------------------
  // A curve over ln(overdrive) through nodes. Below the first node a straight line with slope
  // -tau, which is linear regeneration; between nodes cubics whose slopes at the nodes are those
  // of the parabola through three neighbours; from the last node on constant.
  // What an overdrive needs of it is built when it is first needed under the present conditions.

  task build_tail;
    first_s = {{ curve.node_s[0] }};
    tau_s = {{ curve.tau_s }};
    segment_known[TAIL] = 1'b1;
  endtask

  // Of one segment, in s: delays at its nodes, slopes of the chords from node to node, of the curve
  real begin_s, end_s, chord_before, chord, chord_after, slope_first, slope_last;
{% for segment in curve.segments %}

  task build_segment_{{ segment.number }};  // {{ segment.span }}
{% for line in segment.lines %}
    {{ line }}
{% endfor %}
    keep_segment({{ segment.number }}, {{ segment.width }});
  endtask
{% endfor %}

  // Width in ln(overdrive); slopes are limited, so that the curve falls wherever its nodes do
  task keep_segment(input int k, input real width);
    real bend;
    if (slope_first < 3.0 * chord_before) slope_first = 3.0 * chord_before;
    if (slope_first < 3.0 * chord) slope_first = 3.0 * chord;
    if (slope_first > 0.0) slope_first = 0.0;
    if (slope_last < 3.0 * chord_after) slope_last = 3.0 * chord_after;
    if (slope_last < 3.0 * chord) slope_last = 3.0 * chord;
    if (slope_last > 0.0) slope_last = 0.0;
    bend = (slope_first + slope_last - 2.0 * chord) / width;
    cubic_0[k] = begin_s;
    cubic_1[k] = slope_first;
    cubic_2[k] = (chord - slope_first) / width - bend;
    cubic_3[k] = bend / width;
    segment_known[k] = 1'b1;
  endtask
