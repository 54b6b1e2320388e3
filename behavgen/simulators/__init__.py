"""Find simulators and compilers, build with them, run them."""
