// Runs the syndrome former and the SC decoder over all cases of a folder of golden vectors, compares,
// and writes what the decoder found to +answers, as `frostline vectors --check` reads it.
// Macro: COUNT cases. Plusargs: +vectors=FOLDER, +answers=FILE.
module golden_bench;
  import frostline_pkg::*;

  reg [0:N-1] sender_key[0:`COUNT-1];
  reg [0:N-1] receiver_key[0:`COUNT-1];
  reg [0:M-1] sender_syndrome[0:`COUNT-1];
  reg [0:N-1] golden_output[0:`COUNT-1];
  reg [0:N-1] golden_decisions[0:`COUNT-1];
  reg [0:N-1] answers[0:`COUNT-1];
  string folder, answers_file;
  integer k, wrong_syndromes, wrong_outputs;

  syndrome_former former ();
  sc_decoder decoder ();

  initial begin
`ifndef STATE8
    if (STATE8 != 0) $fatal(1, "the package is precoded: define the macro STATE8");
`endif
    if (!$value$plusargs("vectors=%s", folder)) $fatal(1, "+vectors=FOLDER is missing");
    if (!$value$plusargs("answers=%s", answers_file)) $fatal(1, "+answers=FILE is missing");
    $readmemh({folder, "/sender-key.hex"}, sender_key);
    $readmemh({folder, "/receiver-key.hex"}, receiver_key);
    $readmemh({folder, "/syndrome.hex"}, sender_syndrome);
    $readmemh({folder, "/decoder-output.hex"}, golden_output);
    $readmemh({folder, "/u-decisions.hex"}, golden_decisions);
    wrong_syndromes = 0;
    wrong_outputs = 0;
    for (k = 0; k < `COUNT; k = k + 1) begin
      former.form(sender_key[k]);
      if (former.syndrome !== sender_syndrome[k]) wrong_syndromes = wrong_syndromes + 1;
      former.form(receiver_key[k]);
      decoder.decode(former.syndrome ^ sender_syndrome[k]);
      answers[k] = decoder.errors;
      if (decoder.errors !== golden_output[k] || decoder.decisions !== golden_decisions[k])
        wrong_outputs = wrong_outputs + 1;
    end
    $writememh(answers_file, answers);
    $display("%0d cases, %0d wrong syndromes, %0d wrong outputs", `COUNT, wrong_syndromes,
             wrong_outputs);
  end
endmodule
