-- Prints what an exported VHDL package says: N, M, the mask with element 0 first, the index list.
library ieee;
use ieee.std_logic_1164.all;
use std.textio.all;
use work.frostline_pkg.all;

entity read_package is
end entity;

architecture bench of read_package is
begin
  process
    variable row : line;
  begin
    write(row, integer'image(N) & " " & integer'image(M) & " " & integer'image(BIT_REVERSED));
    writeline(output, row);
    for element in frozen_mask'range loop
      if frozen_mask(element) = '1' then
        write(row, character'('1'));
      else
        write(row, character'('0'));
      end if;
    end loop;
    writeline(output, row);
    for t in frozen_index'range loop
      write(row, integer'image(frozen_index(t)) & " ");
    end loop;
    writeline(output, row);
    wait;
  end process;
end architecture;
