
  // -- Messages: the first of each kind ---------------------------------------------------------

  task warn(input string what);
    if (WARNINGS == 2) begin
      $fatal(1, "[behavgen] %s t=%0.6f ns decision %0d: %s", instance_path,
             $realtime * NS_PER_TICK, last_decision(), what);
    end else if (WARNINGS == 1) begin
      $display("[behavgen] %s t=%0.6f ns decision %0d: %s", instance_path,
               $realtime * NS_PER_TICK, last_decision(), what);
    end
  endtask
