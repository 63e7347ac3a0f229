#pragma once
#include <cstddef>
#include <new>
#include <vector>

namespace lagscape {

/// Allocates on 64-byte borders, so that a row of eight doubles is one cache line and one vector register.
template <class T>
struct AlignedAllocator {
  using value_type = T;
  static constexpr std::align_val_t kBorder{64};
  AlignedAllocator() = default;
  template <class U>
  explicit AlignedAllocator(const AlignedAllocator<U>&) noexcept {}
  T* allocate(std::size_t count) { return static_cast<T*>(::operator new(count * sizeof(T), kBorder)); }
  void deallocate(T* data, std::size_t) noexcept { ::operator delete(data, kBorder); }
  friend bool operator==(const AlignedAllocator&, const AlignedAllocator&) noexcept { return true; }
};

template <class T>
using AlignedVector = std::vector<T, AlignedAllocator<T>>;

}  // namespace lagscape
