models/latch_full.sv
models/latch_full_symbol.sv
models/latch_full_bus.sv
