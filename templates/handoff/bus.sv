// {{ cell }}_bus: COUNT comparators on one clock and one supply.
{% for line in remarks %}
// {{ line }}
{% endfor %}
//
// Each has its own inputs, as words of $realtobits: real numbers cannot stand in arrays on ports
// everywhere. Comparator k takes bits 64*k to 64*k+63, as in
//   assign words[64*k +: 64] = $realtobits(volts_of_k);
// SEED 0 gives each its own noise and mismatch by its hierarchical path; another SEED gives
// comparator k the seed SEED + k.
module {{ cell }}_bus #(
  parameter int COUNT = 8,
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

  for (genvar k = 0; k < COUNT; k++) begin : comparator
    wire [63:0] inp_word_inside = {{ inp }}[64*k +: 64];
    wire [63:0] inn_word_inside = {{ inn }}[64*k +: 64];

    {{ cell }} #(
{% for one in settings %}
{% if one.name == "SEED" %}
      .SEED(SEED == 64'd0 ? 64'd0 : SEED + k){{ "," if not loop.last }}
{% else %}
      .{{ one.name }}({{ one.name }}){{ "," if not loop.last }}
{% endif %}
{% endfor %}
    ) core_inside (
{% for port, net in connections %}
      .{{ port }}({{ net }}){{ "," if not loop.last }}
{% endfor %}
    );
  end
endmodule
