
  // -- Start: what stays the same for the whole simulation --------------------------------------

  string instance_path;
  int process_code;
  real temperature_c;
{% if noise %}
  int noise_on;
{% endif %}
{% if mismatch %}
  int mismatch_on;
{% endif %}

  initial begin
    $sformat(instance_path, "%m");
    take_settings;
    take_keys;
    select_process;
    fold_temperature;
{% if fixed_supply %}
    fold_supply;
{% endif %}
    clk_level = ({{ clk }} === 1'b0 || {{ clk }} === 1'b1) ? {{ clk }} : 1'bx;
{% if can_be_off %}
    on = {{ is_on }};
{% endif %}
{% if not holds %}
    if (clk_level === {{ resting }}{{ " && on" if can_be_off }}) return_to_reset(1);
{% endif %}
  end

  // The command line speaks for all instances and wins over their parameters.
  task take_settings;
    begin
{% if noise %}
      if (!$value$plusargs("behavgen_noise=%d", noise_on)) noise_on = NOISE_ON;
{% endif %}
{% if mismatch %}
      if (!$value$plusargs("behavgen_mismatch=%d", mismatch_on)) mismatch_on = MISMATCH_ON;
{% endif %}
      if (!$value$plusargs("behavgen_temp_c=%f", temperature_c)) temperature_c = TEMPERATURE_C;
      if (!$value$plusargs("behavgen_process=%d", process_code)) process_code = PROCESS;
    end
  endtask

  task select_process;
    begin
      case (process_code)
{% for process in processes %}
{% if process.lines %}
        {{ process.code }}: begin  // {{ process.name }}
{% for line in process.lines %}
          {{ line }}
{% endfor %}
        end
{% else %}
        {{ process.code }}: ;  // {{ process.name }}
{% endif %}
{% endfor %}
        default:
          $fatal(1, "[behavgen] %s t=0: process %0d is unknown; known are {{ known_processes }}",
                 instance_path, process_code);
      endcase
    end
  endtask
