// Plain scalar successive cancellation, in every arithmetic: slow, obvious, the judge of the fast
// decoders.
//
// Decoding works in the error domain: given the difference d of the two ends' public bits, all
// channel LLRs are +ln((1-p)/p), and what is found is the error pattern s.
// E. Arikan, "Channel polarization", IEEE Trans. IT 55(7), 2009, section VIII; LLR form: f and g of
// C. Leroux et al., IEEE Trans. SP 61(2), 2013, eq. (3), (4). Rules of each arithmetic, ties
// included: DEVELOPERS.md, "Arithmetics".
#pragma once

#include "polar/arithmetic.h"
#include "polar/bits.h"
#include "polar/code.h"

namespace frostline {

struct ScDecision {
  BitString errors;  // s, N bits: its public values at frozen indices are the given ones
  BitString u;       // s G, N bits: the decision at each index
};

// difference: N bits, d at frozen indices; values at open indices are ignored.
// qber: 0 < p < 0.5; used by exact arithmetic only. Throws std::invalid_argument on a wrong size.
// SC always returns some s that shows d; whether it is the right one the check bits must tell.
ScDecision decode_sc(const Code& code, const Arithmetic& arithmetic, double qber,
                     const BitString& difference);

// Where successive cancellation would go wrong if a genie told it, at each index, all earlier ones:
// bit i of the result is 1 when its decision at i differs from u_i, u = s G. errors: s, N bits. A
// code with these errors fails exactly when a bit at an open index is 1, because the first wrong
// decision is made with all earlier ones right. Throws InputError when N is no block length.
BitString wrong_decisions_with_genie(const BitString& errors, const Arithmetic& arithmetic,
                                     double qber);

}  // namespace frostline
