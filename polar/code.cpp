#include "polar/code.h"

namespace frostline {

Sha256 code_sha256(const Code& code) {
  return sha256("frostline-code 1\nblock_length " + std::to_string(code.block_length().bits()) +
                "\nfrozen_hex " + code.frozen.to_hex() + "\nprecoding " +
                std::string(precoding_name(code.precoding)) + "\ncheck_bits " +
                std::to_string(code.check_bits) + "\n");
}

}  // namespace frostline
