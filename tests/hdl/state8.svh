// The state of precoding "state8", version 1, for a module that goes through u index by index: what
// a frozen index shows is u plus a row of Y times the state of earlier open bits. Included where the
// macro STATE8 says that the package has its schedule.
  reg [7:0] state;
  reg [7:0] open_byte;

  task begin_state;
    begin
      state = 0;
      open_byte = 0;
    end
  endtask

  // What is added to frozen index i.
  function offset(input integer i);
`ifdef STATE8
    offset = state8_adds[i/8] & ^(state & state8_rows[8*(i%8) +: 8]);
`else
    offset = 1'b0;
`endif
  endfunction

  // Index i is passed; open_bit: u_i where it is open, 0 where it is frozen.
  task pass(input integer i, input open_bit);
    begin
      open_byte[i%8] = open_bit;
      if (i % 8 == 7) begin
`ifdef STATE8
        if (state8_moves[i/8]) state = {state[6:0], 1'b0} ^ (state[7] ? 8'h1d : 8'h00) ^ open_byte;
`endif
        open_byte = 0;
      end
    end
  endtask
