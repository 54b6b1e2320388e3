bench/latch_full_player.sv
bench/latch_full_shells.sv
bench/latch_full_bench.sv
