
  // -- Messages ---------------------------------------------------------------------------------

  task warn(input string what);
    string message;
    message = $sformatf("[behavgen] %s t=%0.6f ns decision %0d: %s", instance_path,
                        $realtime * {{ ns_per_tick }},
                        decision_count == 64'd0 ? 64'd0 : decision_count - 64'd1, what);
    if (WARNINGS == 2) $fatal(1, "%s", message);
    else if (WARNINGS != 0) $display("%s", message);
  endtask
