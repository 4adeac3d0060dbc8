// Prints what an exported SystemVerilog package says: N, M, the mask with element 0 first, and the
// index list where there is one (macro INDEX).
module read_package;
  import frostline_pkg::*;
  initial begin
    $display("%0d %0d %0d", N, M, BIT_REVERSED);
    $display("%b", frozen_mask);
`ifdef INDEX
    for (int t = 0; t < M; t++) $write("%0d ", frozen_index[LOG2_N*t +: LOG2_N]);
    $write("\n");
`endif
  end
endmodule
