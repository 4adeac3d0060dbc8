// Forms the syndrome of one block, as the sender does. Reads nothing but the exported package.
// Elements in natural or bit-reversed order, as the package says; macro STATE8: precoded.
module syndrome_former;
  import frostline_pkg::*;

  reg u[0:N-1];
  reg [0:M-1] syndrome;

`include "state8.svh"

  // x: bit i is position i of the block.
  task form(input [0:N-1] x);
    integer i, distance, first, j, t;
    begin
      for (i = 0; i < N; i = i + 1) u[element(i)] = x[i];
      for (distance = 1; distance < N; distance = 2 * distance)
        for (first = 0; first < N; first = first + 2 * distance)
          for (j = first; j < first + distance; j = j + 1) u[j] = u[j] ^ u[j + distance];
      begin_state;
      t = 0;
      for (i = 0; i < N; i = i + 1)
        if (frozen_mask[element(i)]) begin
          syndrome[t] = u[frozen_index[LOG2_N*t +: LOG2_N]] ^ offset(i);
          t = t + 1;
          pass(i, 1'b0);
        end else pass(i, u[element(i)]);
    end
  endtask

  // Where index i of a block stands.
  function integer element(input integer i);
    integer bit_number;
    begin
      element = i;
      if (BIT_REVERSED != 0) begin
        element = 0;
        for (bit_number = 0; bit_number < LOG2_N; bit_number = bit_number + 1)
          element = 2 * element + ((i >> bit_number) & 1);
      end
    end
  endfunction
endmodule
