#include <whet/support/function_ref.hpp>

#include <type_traits>
#include <vector>

#include <doctest/doctest.h>

using whet::detail::FunctionRef;

namespace {

int doubled(int x) { return 2 * x; }

}  // namespace

TEST_CASE("A function reference calls what it refers to, without a copy") {
  int calls = 0;
  auto counting = [&calls, state = 10](int x) mutable {
    ++calls;
    return ++state + x;
  };
  const FunctionRef<int(int)> reference = counting;
  CHECK(reference(1) == 12);
  CHECK(reference(1) == 13);
  CHECK(calls == 2);
  CHECK(counting(0) == 13);  // it was this state that moved
}

TEST_CASE("A const callable and a pointer to a function are referred to alike") {
  const auto negative = [](int x) { return -x; };
  CHECK(FunctionRef<int(int)>(negative)(3) == -3);
  int (*const pointer)(int) = doubled;
  CHECK(FunctionRef<int(int)>(pointer)(3) == 6);
}

TEST_CASE("Arguments and results convert as in a call") {
  const auto half = [](double x) { return 0.5f * static_cast<float>(x); };
  CHECK(FunctionRef<double(int)>(half)(3) == 1.5);
  const auto size = [](const std::vector<int>& v) { return v.size(); };
  const std::vector<int> three(3);
  CHECK(FunctionRef<std::size_t(const std::vector<int>&)>(size)(three) == 3);
}

TEST_CASE("What cannot be called so is no function reference") {
  const auto one = [](int x) { return x; };
  static_assert(!std::is_constructible_v<FunctionRef<int(int, int)>, decltype(one)&>);
  static_assert(!std::is_constructible_v<FunctionRef<int*(int)>, decltype(one)&>);
  CHECK(std::is_constructible_v<FunctionRef<int(int)>, decltype(one)&>);
}
