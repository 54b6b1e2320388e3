"""ComparatorModel -> emitted files: SystemVerilog and Verilog-A."""
