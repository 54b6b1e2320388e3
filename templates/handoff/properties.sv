// Assertions and coverage of every {{ cell }}, for simulators with concurrent assertions and
// covergroups.
{% for line in remarks %}
// {{ line }}
{% endfor %}
//
// Compile this file after the model: the bind below attaches it to all instances. It is outside
// files.f, since not every simulator takes it.
//
// Assertions fail where the cell is used outside what its model can vouch for, or where the
// model breaks its own rules.
module {{ cell }}_properties (
{% for port in ports %}
  input {{ port.kind }} {{ port.name }},
{% endfor %}
  input int x_cause,
  input bit [63:0] decision_count,
  input real overdrive_v
);
  timeunit {{ precision }};
  timeprecision {{ precision }};

  // The decision edge, and the end of the decision phase. What is sampled there stood before it.
  event decision_edge;
  event phase_end;
  always @({{ edge }} {{ clk }}) -> decision_edge;
  always @({{ back_edge }} {{ clk }}) -> phase_end;

  // -- How the cell is used ---------------------------------------------------------------------

  property clock_is_known;
    @({{ clk }}) decision_count != 0 |-> !$isunknown({{ clk }});
  endproperty
  a_clock_is_known: assert property (clock_is_known)
    else $error("%m: the clock is unknown after the first decision");

  function automatic bit is_finite(input real volts);
    return volts - volts == 0.0;
  endfunction

  always @(decision_edge) begin
    a_inputs_are_numbers: assert (is_finite({{ inp }}) && is_finite({{ inn }}))
      else $error("%m: an input is not a number at a decision edge");
{% if vdd and supply_low %}
    a_supply_is_characterised: assert (
        {{ vdd }} >= {{ supply_low }} &&
        {{ vdd }} <= {{ supply_high }})
      else $error("%m: supply %g V outside {{ supply_low }} V to {{ supply_high }} V", {{ vdd }});
{% endif %}
{% if common_low %}
    a_common_mode_is_characterised: assert (
        0.5 * ({{ inp }} + {{ inn }}) >= {{ common_low }} &&
        0.5 * ({{ inp }} + {{ inn }}) <= {{ common_high }})
      else $error("%m: common mode %g V outside {{ common_low }} V to {{ common_high }} V",
                  0.5 * ({{ inp }} + {{ inn }}));
{% endif %}
  end

  // -- What the model shows ---------------------------------------------------------------------
{% if outn %}

  // At the end of a decision phase both outputs are known, or neither is.
  property outputs_go_together;
    @({{ back_edge }} {{ clk }}) $isunknown({{ outp }}) == $isunknown({{ outn }});
  endproperty
  a_outputs_go_together: assert property (outputs_go_together)
    else $error("%m: one output is known, its complement is not");

  // They differ while they show a decision, so that neither can be taken for the other.
  c_one_is_shown: cover property (@({{ back_edge }} {{ clk }}) {{ outp }} && !{{ outn }});
  c_zero_is_shown: cover property (@({{ back_edge }} {{ clk }}) !{{ outp }} && {{ outn }});
{% endif %}
{% if unresolved %}

  // The flag rises at the end of a decision phase only.
  property flag_rises_at_the_end;
    @(posedge {{ unresolved }}) {{ clk }} === {{ resting }};
  endproperty
  a_flag_rises_at_the_end: assert property (flag_rises_at_the_end)
    else $error("%m: unresolved rose within a decision phase");

  c_unresolved: cover property (@(posedge {{ unresolved }}) 1'b1);
  c_resolved_again: cover property (@(negedge {{ unresolved }}) 1'b1);
{% endif %}

  // -- Coverage ---------------------------------------------------------------------------------

  // Decade of the overdrive: -6 is 1 uV to 10 uV.
  function automatic int decade(input real volts);
    real magnitude;
    magnitude = volts < 0.0 ? -volts : volts;
    return magnitude < 1e-15 ? -15 : int'($floor($log10(magnitude)));
  endfunction

  int overdrive_decade;
  bit leans_to_one;
  bit leant_to_one;

  covergroup decisions;
    option.per_instance = 1;
    overdrive: coverpoint overdrive_decade {
      bins below_1uv = {[-15:-7]};
      bins from_1uv = {-6};
      bins from_10uv = {-5};
      bins from_100uv = {-4};
      bins from_1mv = {-3};
      bins from_10mv = {-2};
      bins from_100mv = {[-1:3]};
    }
    leaning: coverpoint leans_to_one;
    previous: coverpoint leant_to_one;
    overdrive_by_leaning: cross overdrive, leaning;
    after_previous: cross previous, leaning;
    cause: coverpoint x_cause {
      bins decided = {0};
      bins unresolved = {1};
      bins no_supply = {2};
      bins no_number = {3};
      bins no_clock = {4};
      bins before_first = {5};
    }
  endgroup

  decisions coverage = new();

  // At the end of the phase the overdrive is that of the decision.
  always @(phase_end) begin
    leant_to_one = leans_to_one;
    leans_to_one = overdrive_v > 0.0;
    overdrive_decade = decade(overdrive_v);
    coverage.sample();
  end
endmodule

bind {{ cell }} {{ cell }}_properties properties_inside (
{% for port in ports %}
  .{{ port.name }}({{ port.name }}),
{% endfor %}
  .x_cause(x_cause),
  .decision_count(decision_count),
  .overdrive_v(overdrive_v)
);
