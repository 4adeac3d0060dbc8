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
    variable digits : string(1 to N);
  begin
    write(output, integer'image(N) & " " & integer'image(M) & " " & integer'image(BIT_REVERSED) & LF);
    for element in frozen_mask'range loop
      if frozen_mask(element) = '1' then
        digits(element + 1) := '1';
      else
        digits(element + 1) := '0';
      end if;
    end loop;
    write(output, digits & LF);
    for t in frozen_index'range loop
      write(output, integer'image(frozen_index(t)) & " ");
    end loop;
    write(output, (1 => LF));
    wait;
  end process;
end architecture;
