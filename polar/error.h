// The two kinds of failure that are exceptions.
//
// What is expected to go wrong in normal service (a block that does not decode, a group whose tag
// disagrees) is never an exception: it is part of the result value.
#pragma once

#include <stdexcept>
#include <string>

namespace frostline {

// Something that came from outside (a file, an option, a key) is wrong. what() is one line that
// says what is wrong and where, fit to be shown to the user as it stands.
class InputError : public std::runtime_error {
 public:
  using std::runtime_error::runtime_error;
};

// The user or the caller asked that the work stop; nothing is wrong.
class Interrupted : public std::runtime_error {
 public:
  Interrupted() : std::runtime_error("interrupted") {}
};

}  // namespace frostline
