// Reads an exported memory with $readmemh and prints its elements in order, element 0 first.
// Macros: N elements, WIDTH bits a word. Plusargs: +file=NAME.
module read_memory;
  reg [0:`WIDTH-1] mask [0:`N/`WIDTH-1];
  reg [8*256:1] file;
  integer word;
  initial begin
    if (!$value$plusargs("file=%s", file)) $finish;
    $readmemh(file, mask);
    for (word = 0; word < `N/`WIDTH; word = word + 1) $write("%b", mask[word]);
    $write("\n");
  end
endmodule
