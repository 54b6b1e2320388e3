// {{ symbol.name }}: {{ cell }} as its schematic symbol
//
// Pins and their order are those of the symbol, supplies are logic levels, parameters are those of
// the module itself.
{% for line in remarks %}
// {{ line }}
{% endfor %}
module {{ symbol.name }} #(
{% if has_vdd %}
  parameter real SUPPLY_V = {{ supply }},  // V, behind a 1 on the supply
{% endif %}
{% for one in settings %}
  parameter {{ one.type }} {{ one.name }} = {{ one.default }}{{ "," if not loop.last }}
{% endfor %}
) (
{% for pin in pins %}
  {{ pin.declaration }}{{ "," if not loop.last }}  // {{ pin.meaning }}
{% endfor %}
);
  timeunit {{ precision }};
  timeprecision {{ precision }};

  // Powered while every supply is 1 and every ground is 0; otherwise the outputs are unknown.
  wire powered_inside = {{ powered }};
{% for wire in wires %}
  wire {{ wire }};
{% endfor %}

  {{ cell }} #(
{% for one in settings %}
    .{{ one.name }}({{ one.name }}){{ "," if not loop.last }}
{% endfor %}
  ) core_inside (
{% for port, net in connections %}
    .{{ port }}({{ net }}){{ "," if not loop.last }}
{% endfor %}
  );

{% for pin, wire in outputs %}
  assign {{ pin }} = powered_inside ? {{ wire }} : 1'bx;
{% endfor %}
endmodule
