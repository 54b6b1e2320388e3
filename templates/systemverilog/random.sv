
  // -- Random numbers ---------------------------------------------------------------------------
  // A counter through the mixing function SplitMix64 (Steele, Lea, Flood, OOPSLA 2014): no draw
  // needs those before it. Only + - * / and square root, so that all simulators draw the same.

  localparam logic [63:0] GOLDEN = 64'h9e37_79b9_7f4a_7c15;

  task take_keys;
    logic [63:0] seed, run_seed;
    seed = SEED == 64'd0 ? path_seed(instance_path) : SEED;
    if (!$value$plusargs("behavgen_seed=%d", run_seed)) run_seed = 64'd0;
{% for key in keys %}
    {{ key.name }} = stream_key(seed, run_seed, 64'd{{ key.channel }});
{% endfor %}
  endtask

  // FNV-1a (IETF RFC 9923) over the hierarchical path, so that no two instances draw alike
  function automatic logic [63:0] path_seed(input string path);
    logic [63:0] hash;
    hash = 64'hcbf2_9ce4_8422_2325;
    for (int i = 0; i < path.len(); i = i + 1) begin
      hash = (hash ^ {56'd0, path[i]}) * 64'h0000_0100_0000_01b3;
    end
    return hash;
  endfunction

  function automatic logic [63:0] stream_key(
      input logic [63:0] seed, input logic [63:0] run_seed, input logic [63:0] channel);
    logic [63:0] key;
    key = mix(seed + GOLDEN);
    key = mix((key ^ run_seed) + GOLDEN);
    return mix((key ^ channel) + GOLDEN);
  endfunction

  // Draw number 0 has count 1
  function automatic logic [63:0] random_bits(input logic [63:0] key, input logic [63:0] count);
    return mix(key + count * GOLDEN);
  endfunction

  function automatic logic [63:0] mix(input logic [63:0] x);
    logic [63:0] z;
    z = (x ^ (x >> 30)) * 64'hbf58_476d_1ce4_e5b9;
    z = (z ^ (z >> 27)) * 64'h94d0_49bb_1331_11eb;
    return z ^ (z >> 31);
  endfunction
{% if normal %}

  // Algorithm AS 241 (Wichura, Applied Statistics 37, 1988) on the upper 52 bits; |z| < 8.3
  function automatic real standard_normal(input logic [63:0] bits);
    real q, r, z;
    q = bits[63:12];
    q = (q + 0.5) * 2.220446049250313e-16 - 0.5;
    if (q >= -0.425 && q <= 0.425) begin
      r = 0.180625 - q * q;
      return q
          * (((((((2.5090809287301226727e3 * r + 3.3430575583588128105e4) * r
          + 6.7265770927008700853e4) * r + 4.5921953931549871457e4) * r
          + 1.3731693765509461125e4) * r + 1.9715909503065514427e3) * r
          + 1.3314166789178437745e2) * r + 3.3871328727963666080)
          / (((((((5.2264952788528545610e3 * r + 2.8729085735721942674e4) * r
          + 3.9307895800092710610e4) * r + 2.1213794301586595867e4) * r
          + 5.3941960214247511077e3) * r + 6.8718700749205790830e2) * r
          + 4.2313330701600911252e1) * r + 1.0);
    end
    r = $sqrt(-exact_ln(q < 0.0 ? 0.5 + q : 0.5 - q));
    if (r <= 5.0) begin
      r = r - 1.6;
      z = (((((((7.74545014278341407640e-4 * r + 2.27238449892691845833e-2) * r
          + 2.41780725177450611770e-1) * r + 1.27045825245236838258) * r
          + 3.64784832476320460504) * r + 5.76949722146069140550) * r
          + 4.63033784615654529590) * r + 1.42343711074968357734)
          / (((((((1.05075007164441684324e-9 * r + 5.47593808499534494600e-4) * r
          + 1.51986665636164571966e-2) * r + 1.48103976427480074590e-1) * r
          + 6.89767334985100004550e-1) * r + 1.67638483018380384940) * r
          + 2.05319162663775882187) * r + 1.0);
    end else begin
      r = r - 5.0;
      z = (((((((2.01033439929228813265e-7 * r + 2.71155556874348757815e-5) * r
          + 1.24266094738807843860e-3) * r + 2.65321895265761230930e-2) * r
          + 2.96560571828504891230e-1) * r + 1.78482653991729133580) * r
          + 5.46378491116411436990) * r + 6.65790464350110377720)
          / (((((((2.04426310338993978564e-15 * r + 1.42151175831644588870e-7) * r
          + 1.84631831751005468180e-5) * r + 7.86869131145613259100e-4) * r
          + 1.48753612908506148525e-2) * r + 1.36929880922735805310e-1) * r
          + 5.99832206555887937690e-1) * r + 1.0);
    end
    return q < 0.0 ? -z : z;
  endfunction

  // ln(2^e m) = e ln 2 + 2 s (1 + s^2/3 + s^4/5 + ...), s = (m - 1) / (m + 1), ln 2 in two parts
  function automatic real exact_ln(input real x);
    logic [63:0] bits;
    real e, m, s, z;
    bits = $realtobits(x);
    e = bits[62:52];
    e = e - 1022.0;
    m = $bitstoreal({12'd1022, bits[51:0]});
    if (m < 0.70710678118654757) begin
      m = m + m;
      e = e - 1.0;
    end
    s = (m - 1.0) / (m + 1.0);
    z = s * s;
    return e * 0.6931471803691238 + (e * 1.9082149292705877e-10 + (2.0 * s)
        * ((((((((((1.0 / 21.0 * z + 1.0 / 19.0) * z + 1.0 / 17.0) * z + 1.0 / 15.0) * z
        + 1.0 / 13.0) * z + 1.0 / 11.0) * z + 1.0 / 9.0) * z + 1.0 / 7.0) * z
        + 1.0 / 5.0) * z + 1.0 / 3.0) * z + 1.0));
  endfunction
{% endif %}
{% if exact_exp %}

  // exp(k ln 2 + r) = 2^k (1 + r + r^2/2! + r^3/3! + ...), ln 2 in two parts
  function automatic real exact_exp(input real x);
    real k, r;
    logic [10:0] exponent;
    k = $floor(x * 1.4426950408889634 + 0.5);
    r = (x - k * 0.6931471803691238) - k * 1.9082149292705877e-10;
    exponent = k + 1023.0;
    return (((((((((((((1.0 / 6227020800.0 * r + 1.0 / 479001600.0) * r
        + 1.0 / 39916800.0) * r + 1.0 / 3628800.0) * r + 1.0 / 362880.0) * r
        + 1.0 / 40320.0) * r + 1.0 / 5040.0) * r + 1.0 / 720.0) * r + 1.0 / 120.0) * r
        + 1.0 / 24.0) * r + 1.0 / 6.0) * r + 0.5) * r + 1.0) * r + 1.0)
        * $bitstoreal({1'b0, exponent, 52'd0});
  endfunction
{% endif %}
