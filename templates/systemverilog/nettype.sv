{% for line in head %}
{{ line }}
{% endfor %}

// A node to which any number of sources is joined. The same in the files of all cells, and taken
// once where they are compiled together.
`ifndef BEHAVGEN_NODE
`define BEHAVGEN_NODE
package behavgen_node;  // verilog_lint: waive package-filename
  timeunit 1ns;
  timeprecision 1fs;

  // What drives a node, or what all that drive it amount to: volts behind a conductance. Without
  // a resistance to speak of, 1e12 siemens will do; with 0 a source has no say.
  typedef struct {
    real volts;
    real siemens;
  } source_t;

  // The voltage at which all currents into the node cancel (Kirchhoff's law)
  function automatic source_t joined(input source_t sources[]);
    source_t node;
    real amperes;
    amperes = 0.0;
    node.siemens = 0.0;
    foreach (sources[k]) begin
      amperes = amperes + sources[k].volts * sources[k].siemens;
      node.siemens = node.siemens + sources[k].siemens;
    end
    node.volts = node.siemens > 0.0 ? amperes / node.siemens : 0.0;
    return node;
  endfunction

  nettype source_t node_t with joined;
endpackage
`endif
{{ core }}
module {{ name }}
  import behavgen_node::*;
#(
{% for line in parameters %}
  {{ line }}
{% endfor %}
) (
{% for line in ports %}
  {{ line }}
{% endfor %}
);
  timeunit {{ time_precision }};
  timeprecision {{ time_precision }};

  {{ name }}_core #(
{% for parameter in parameter_names %}
    .{{ parameter }}({{ parameter }}){{ "" if loop.last else "," }}
{% endfor %}
  ) core (
{% for pin, connected in connections %}
    .{{ pin }}({{ connected }}){{ "" if loop.last else "," }}
{% endfor %}
  );
endmodule
