// expect: whet: an Observable must be callable, const, with const whet::Point<double>&
#include <whet/observables/concatenate.hpp>

int main() {
  int calls = 0;
  const auto counting = [calls](const whet::Point<double>&) mutable {
    return std::vector<double>{static_cast<double>(++calls)};
  };
  (void)whet::concatenate(counting);
}
