
  // -- Start: what stays for the whole simulation -----------------------------------------------

  string instance_path;
  int process_code;
{% if temperature.matters %}
  real temperature_c;
{% endif %}
{% if noise %}
  int noise_on;
  logic [63:0] noise_key;
{% endif %}
{% if mismatch %}
  int mismatch_on;
  logic [63:0] mismatch_key;
  real {{ mismatch_names | join(", ") }};  // this instance, in sigmas
{% endif %}
  logic [63:0] coin_key;

  initial begin
    $sformat(instance_path, "%m");
    take_settings;
    take_keys;
    select_process;
{% if constants %}
    take_constants;
{% endif %}
{% if temperature.matters %}
    fold_temperature;
{% endif %}
{% if fixed_supply %}
    fold_supply;
{% endif %}
    clk_level = {{ pins.clk }};
{% if is_on %}
    is_on = {{ is_on }};
{% endif %}
{% if not holds %}
    if (clk_level === {{ resting }}{{ " && is_on" if is_on }}) power_up;
{% endif %}
  end

  // The command line speaks to all instances and wins over their parameters
  task take_settings;
{% if noise %}
    if (!$value$plusargs("behavgen_noise=%d", noise_on)) noise_on = NOISE_ON;
{% endif %}
{% if mismatch %}
    if (!$value$plusargs("behavgen_mismatch=%d", mismatch_on)) mismatch_on = MISMATCH_ON;
{% endif %}
{% if temperature.matters %}
    if (!$value$plusargs("behavgen_temp_c=%f", temperature_c)) temperature_c = TEMPERATURE_C;
{% endif %}
    if (!$value$plusargs("behavgen_process=%d", process_code)) process_code = PROCESS;
  endtask

  // One stream of random numbers for each purpose
  task take_keys;
    logic [63:0] seed, run_seed;
    seed = SEED == 64'd0 ? path_seed(instance_path) : SEED;
    if (!$value$plusargs("behavgen_seed=%d", run_seed)) run_seed = 64'd0;
{% if noise %}
    noise_key = stream_key(seed, run_seed, 64'd0);
{% endif %}
{% if mismatch %}
    mismatch_key = stream_key(seed, run_seed, 64'd1);
{% for name in mismatch_names %}
    {{ name }} = standard_normal(random_bits(mismatch_key, 64'd{{ loop.index }}));
{% endfor %}
{% endif %}
    coin_key = stream_key(seed, run_seed, 64'd2);
  endtask

  task select_process;
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
      default: begin
        $fatal(1, "[behavgen] %s t=0: the process code %0d is unknown; known are %s",
               instance_path, process_code,
               {{ known_processes }});
      end
    endcase
  endtask
