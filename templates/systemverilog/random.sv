
  // -- Random numbers ---------------------------------------------------------------------------
  // A counter through the mixing function SplitMix64 (Steele, Lea, Flood, OOPSLA 2014): no draw
  // needs those before it. Only + - * / and square root, so that all simulators draw the same.

  localparam logic [63:0] GOLDEN = 64'h9e37_79b9_7f4a_7c15;

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

  // Draw number n has the count n + 1
  function automatic logic [63:0] random_bits(input logic [63:0] key, input logic [63:0] count);
    return mix(key + count * GOLDEN);
  endfunction

  function automatic logic [63:0] mix(input logic [63:0] word);
    logic [63:0] mixed;
    mixed = (word ^ (word >> 30)) * 64'hbf58_476d_1ce4_e5b9;
    mixed = (mixed ^ (mixed >> 27)) * 64'h94d0_49bb_1331_11eb;
    return mixed ^ (mixed >> 31);
  endfunction
{% if noise or mismatch %}

  // Algorithm AS 241 (Wichura, Applied Statistics 37, 1988) on the upper 52 bits; below 8.3
  function automatic real standard_normal(input logic [63:0] bits);
    real centred, arg, value;
    centred = real'(bits[63:12]);
    centred = (centred + 0.5) * 2.220446049250313e-16 - 0.5;
    if (centred >= -0.425 && centred <= 0.425) begin
      arg = 0.180625 - centred * centred;
      return centred
          * (((((((2.5090809287301226727e3 * arg + 3.3430575583588128105e4) * arg
          + 6.7265770927008700853e4) * arg + 4.5921953931549871457e4) * arg
          + 1.3731693765509461125e4) * arg + 1.9715909503065514427e3) * arg
          + 1.3314166789178437745e2) * arg + 3.3871328727963666080)
          / (((((((5.2264952788528545610e3 * arg + 2.8729085735721942674e4) * arg
          + 3.9307895800092710610e4) * arg + 2.1213794301586595867e4) * arg
          + 5.3941960214247511077e3) * arg + 6.8718700749205790830e2) * arg
          + 4.2313330701600911252e1) * arg + 1.0);
    end
    arg = $sqrt(-exact_ln(centred < 0.0 ? 0.5 + centred : 0.5 - centred));
    if (arg <= 5.0) begin
      arg = arg - 1.6;
      value = (((((((7.74545014278341407640e-4 * arg + 2.27238449892691845833e-2) * arg
          + 2.41780725177450611770e-1) * arg + 1.27045825245236838258) * arg
          + 3.64784832476320460504) * arg + 5.76949722146069140550) * arg
          + 4.63033784615654529590) * arg + 1.42343711074968357734)
          / (((((((1.05075007164441684324e-9 * arg + 5.47593808499534494600e-4) * arg
          + 1.51986665636164571966e-2) * arg + 1.48103976427480074590e-1) * arg
          + 6.89767334985100004550e-1) * arg + 1.67638483018380384940) * arg
          + 2.05319162663775882187) * arg + 1.0);
    end else begin
      arg = arg - 5.0;
      value = (((((((2.01033439929228813265e-7 * arg + 2.71155556874348757815e-5) * arg
          + 1.24266094738807843860e-3) * arg + 2.65321895265761230930e-2) * arg
          + 2.96560571828504891230e-1) * arg + 1.78482653991729133580) * arg
          + 5.46378491116411436990) * arg + 6.65790464350110377720)
          / (((((((2.04426310338993978564e-15 * arg + 1.42151175831644588870e-7) * arg
          + 1.84631831751005468180e-5) * arg + 7.86869131145613259100e-4) * arg
          + 1.48753612908506148525e-2) * arg + 1.36929880922735805310e-1) * arg
          + 5.99832206555887937690e-1) * arg + 1.0);
    end
    return centred < 0.0 ? -value : value;
  endfunction

  // ln(m 2^e) = e ln 2 + 2 s (1 + s^2/3 + s^4/5 + ...), s = (m - 1) / (m + 1); ln 2 in two parts
  function automatic real exact_ln(input real arg);
    logic [63:0] bits;
    real exponent, mantissa, ratio, square;
    bits = $realtobits(arg);
    exponent = real'(bits[62:52]) - 1022.0;
    mantissa = $bitstoreal({12'd1022, bits[51:0]});
    if (mantissa < 0.70710678118654757) begin
      mantissa = mantissa + mantissa;
      exponent = exponent - 1.0;
    end
    ratio = (mantissa - 1.0) / (mantissa + 1.0);
    square = ratio * ratio;
    return exponent * 0.6931471803691238 + (exponent * 1.9082149292705877e-10 + (2.0 * ratio)
        * ((((((((((1.0 / 21.0 * square + 1.0 / 19.0) * square + 1.0 / 17.0) * square
        + 1.0 / 15.0) * square + 1.0 / 13.0) * square + 1.0 / 11.0) * square + 1.0 / 9.0) * square
        + 1.0 / 7.0) * square + 1.0 / 5.0) * square + 1.0 / 3.0) * square + 1.0));
  endfunction
{% endif %}
{% if needs_exact_exp %}

  // exp(k ln 2 + r) = 2^k (1 + 2 r / (r coth(r/2) - r)), r coth(r/2) = 2 + r^2/6 - r^4/360 + ...
  function real exact_exp(input real arg);
    real power, rest, square;
    power = (arg * 1.4426950408889634 + ROUND) - ROUND;
    rest = (arg - power * 0.6931471803691238) - power * 1.9082149292705877e-10;
    square = rest * rest;
    return (2.0 * rest / (((((((-691.0 / 653837184000.0 * square + 1.0 / 23950080.0) * square
        - 1.0 / 604800.0) * square + 1.0 / 15120.0) * square - 1.0 / 360.0) * square + 1.0 / 6.0)
        * square + 2.0) - rest) + 1.0) * 2.0 ** power;
  endfunction
{% endif %}
