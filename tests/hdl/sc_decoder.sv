// A behavioural SC decoder in planes:W, memory by memory as hardware would have it: one message
// memory a level, one partial-sum memory. It decodes the error pattern from the difference of the
// two ends' public bits; channel messages are never stored, as all are one positive channel LLR.
//
// A message is {sign, magnitude}, the unit two channel LLRs. Rules:
//   f  sign_a ^ sign_b, the smaller magnitude
//   g  with t = sign_a ^ sign_b ^ bit: t = 0 sign_b and the saturated sum; t = 1 the absolute
//      difference, sign_b unless magnitude_a > magnitude_b, then the other sign. So a magnitude of
//      0 keeps sign_b.
//   g below a node of constant messages: magnitude 1 - bit, positive.
//   An open index decides its sign bit; an open u_0 decides 0.
//
// Macro STATE8: frozen bits are precoded. Three macros break one rule each, for the test that golden vectors catch it: ZERO_IS_POSITIVE,
// WRAPS, REVERSED_INDICES.
module sc_decoder;
  import frostline_pkg::*;

  localparam [W-1:0] LARGEST = {W{1'b1}};

  // Level k holds the messages of the node of 2^k indices at hand, from element 0 on.
  reg [W:0] message[0:LOG2_N*N-1];
  reg u[0:N-1];
  reg sum[0:N-1];  // partial sums; of the whole block in the end: the error pattern
  reg [0:N-1] errors;
  reg [0:N-1] decisions;

`include "state8.svh"

  function [W:0] f(input [W:0] a, input [W:0] b);
    f = {a[W] ^ b[W], a[W-1:0] < b[W-1:0] ? a[W-1:0] : b[W-1:0]};
  endfunction

  function [W:0] g(input [W:0] a, input [W:0] b, input bit_value);
    reg [W:0] total;
    begin
      total = {1'b0, a[W-1:0]} + {1'b0, b[W-1:0]};
      if ((a[W] ^ b[W] ^ bit_value) == 1'b0) begin
`ifdef WRAPS
        g = {b[W], total[W-1:0]};
`else
        g = {b[W], total > LARGEST ? LARGEST : total[W-1:0]};
`endif
      end else if (a[W-1:0] > b[W-1:0]) g = {~b[W], a[W-1:0] - b[W-1:0]};
      else g = {b[W], b[W-1:0] - a[W-1:0]};
`ifdef ZERO_IS_POSITIVE
      if (g[W-1:0] == 0) g[W] = 1'b0;
`endif
    end
  endfunction

  // Whether index i of u is frozen, and where the mask says so.
  function is_frozen(input integer i);
    integer bit_number, element;
    begin
      element = i;
`ifdef REVERSED_INDICES
      if (BIT_REVERSED == 0) begin
`else
      if (BIT_REVERSED != 0) begin
`endif
        element = 0;
        for (bit_number = 0; bit_number < LOG2_N; bit_number = bit_number + 1)
          element = 2 * element + ((i >> bit_number) & 1);
      end
      is_frozen = frozen_mask[element];
    end
  endfunction

  // The right half of a node of 2^(level+1) indices from first on: its messages.
  task make_right(input integer level, input integer first);
    integer j, half;
    begin
      half = 1 << level;
      for (j = 0; j < half; j = j + 1)
        if (first == 0) message[level*N+j] = sum[j] ? 0 : 1;
        else
          message[level*N+j] = g(message[(level+1)*N+j], message[(level+1)*N+half+j], sum[first+j]);
    end
  endtask

  // The left halves below a node of 2^level indices, down to one index.
  task make_left(input integer level);
    integer j, k;
    for (k = level - 1; k >= 0; k = k - 1)
      for (j = 0; j < (1 << k); j = j + 1)
        message[k*N+j] = f(message[(k+1)*N+j], message[(k+1)*N+(1<<k)+j]);
  endtask

  // difference: bit t is bit t of the difference of the syndromes.
  task decode(input [0:M-1] difference);
    integer i, j, t, level, first;
    begin
      begin_state;
      t = 0;
      for (i = 0; i < N; i = i + 1) begin
        if (i > 0) begin
          level = 0;  // of the right half that begins at i
          while (((i >> level) & 1) == 0) level = level + 1;
          make_right(level, i - (1 << level));
          make_left(level);
        end
        if (is_frozen(i)) begin
          u[i] = difference[t] ^ offset(i);
          t = t + 1;
        end else u[i] = i == 0 ? 1'b0 : message[0][W];
`ifdef REVERSED_INDICES
        if (u[i] === 1'bx) u[i] = 1'b0;
`endif
        pass(i, is_frozen(i) ? 1'b0 : u[i]);
        sum[i] = u[i];
        level = 0;  // nodes that end at i: left + right beside right
        while (level < LOG2_N && ((i >> level) & 1) == 1) begin
          first = i + 1 - (2 << level);
          for (j = 0; j < (1 << level); j = j + 1)
            sum[first+j] = sum[first+j] ^ sum[first+(1<<level)+j];
          level = level + 1;
        end
      end
      for (i = 0; i < N; i = i + 1) begin
        errors[i] = sum[i];
        decisions[i] = u[i];
      end
    end
  endtask
endmodule
