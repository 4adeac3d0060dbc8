// A view of contiguous elements that somebody else owns (C++17 has no std::span).
#pragma once

#include <cassert>
#include <cstddef>
#include <type_traits>

namespace frostline {

template <typename T>
class Span {
 public:
  using value_type = std::remove_cv_t<T>;

  constexpr Span() = default;
  constexpr Span(T* data, std::size_t size) : data_(data), size_(size) {}
  // From any container with data() and size(), and from Span<U> to Span<const U>.
  template <typename Container, typename = std::enable_if_t<std::is_convertible_v<
                                    decltype(std::declval<Container&>().data()), T*>>>
  constexpr Span(Container& container)  // NOLINT: implicit on purpose, as std::span
      : data_(container.data()), size_(container.size()) {}
  template <typename Container, typename = std::enable_if_t<std::is_convertible_v<
                                    decltype(std::declval<const Container&>().data()), T*>>>
  constexpr Span(const Container& container)  // NOLINT
      : data_(container.data()), size_(container.size()) {}

  constexpr T* data() const { return data_; }
  constexpr std::size_t size() const { return size_; }
  constexpr bool empty() const { return size_ == 0; }
  constexpr T* begin() const { return data_; }
  constexpr T* end() const { return data_ + size_; }
  constexpr T& operator[](std::size_t i) const {
    assert(i < size_);
    return data_[i];
  }
  // REQUIRES: first + count <= size().
  constexpr Span subspan(std::size_t first, std::size_t count) const {
    assert(first + count <= size_);
    return Span(data_ + first, count);
  }

 private:
  T* data_ = nullptr;
  std::size_t size_ = 0;
};

}  // namespace frostline
