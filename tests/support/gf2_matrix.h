// A matrix over GF(2) of the m4ri library, with an owner.
#pragma once

#include <m4ri/m4ri.h>

#include <cstddef>

namespace frostline::testing {

class Gf2Matrix {
 public:
  Gf2Matrix(std::size_t rows, std::size_t columns)
      : matrix_(mzd_init(static_cast<rci_t>(rows), static_cast<rci_t>(columns))) {}
  ~Gf2Matrix() { mzd_free(matrix_); }
  Gf2Matrix(const Gf2Matrix&) = delete;
  Gf2Matrix& operator=(const Gf2Matrix&) = delete;

  void set(std::size_t row, std::size_t column, bool value) {
    mzd_write_bit(matrix_, static_cast<rci_t>(row), static_cast<rci_t>(column), value);
  }
  bool get(std::size_t row, std::size_t column) const {
    return mzd_read_bit(matrix_, static_cast<rci_t>(row), static_cast<rci_t>(column)) != 0;
  }
  mzd_t* get() { return matrix_; }
  const mzd_t* get() const { return matrix_; }

  std::size_t rank() const {
    mzd_t* const copy = mzd_copy(nullptr, matrix_);
    const rci_t rank = mzd_echelonize(copy, 0);
    mzd_free(copy);
    return static_cast<std::size_t>(rank);
  }

 private:
  mzd_t* matrix_;
};

}  // namespace frostline::testing
