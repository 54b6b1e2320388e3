// Self-checking bench of {{ cell }}.
{% for line in remarks %}
// {{ line }}
{% endfor %}
// Prints PASS and ends with exit code 0, or prints FAIL and ends with another one.
module {{ cell }}_bench;
  timeunit {{ precision }};
  timeprecision {{ precision }};

{% for run in runs %}
  // {{ run.title }}
  {{ cell }}_player #(
    .NAME("{{ run.title }}"),
    .CLOCK("{{ run.clock }}"),
    .INPUTS("{{ run.inputs }}"),
    .EXPECTED("{{ run.expected }}"),
    .DECISIONS({{ run.decisions }}),
    .CHANGES({{ run.changes }}),
    .LOOKS({{ run.looks }}),
{% for name, value in run.parameters %}
    .{{ name }}({{ value }}){{ "," if not loop.last }}
{% endfor %}
  ) run{{ run.index }} ();

{% endfor %}
  // The symbol and the bus show what the module itself shows.
  {{ cell }}_shells shells ();

  int compared;
  int faults;
  bit damaged;

  initial begin : judge
    wait (shells.done);
{% for run in runs %}
    wait (run{{ run.index }}.done);
{% endfor %}
    damaged = 1'b0;
    compared = shells.compared;
    faults = shells.faults;
{% for run in runs %}
    damaged = damaged || run{{ run.index }}.damaged;
    compared = compared + run{{ run.index }}.compared;
    faults = faults + run{{ run.index }}.faults;
{% endfor %}
{% for line in remarks %}
    $display("{{ line }}");
{% endfor %}
    if (!damaged && faults == 0 && compared >= {{ fewest }}) begin
      $display("PASS  %0d values compared in {{ decisions }} decisions, none wrong", compared);
      $finish;
    end else begin
      $fatal(1, "FAIL  %0d of %0d values wrong%0s", faults, compared,
             damaged ? ", and vector files are missing or damaged" : "");
    end
  end
endmodule
