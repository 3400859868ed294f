#pragma once
/// A reference to something callable, so that one engine serves every observable.

#include <memory>
#include <type_traits>
#include <utility>

namespace whet::detail {

template <class Signature>
class FunctionRef;

/// Refers to a callable without owning it: valid as long as the callable lives.
template <class Result, class... Arguments>
class FunctionRef<Result(Arguments...)> {
 public:
  // A parameter type, implicit as a reference is; the constraint keeps copies out of it.
  // NOLINTBEGIN(google-explicit-constructor,bugprone-forwarding-reference-overload)
  template <class F>
  requires(!std::is_same_v<std::remove_cvref_t<F>, FunctionRef> &&
           std::is_invocable_r_v<Result, F&, Arguments...>) FunctionRef(F&& f)
      : object_(const_cast<void*>(static_cast<const void*>(std::addressof(f)))),
        call_([](void* object, Arguments... arguments) -> Result {
          return (*static_cast<std::remove_reference_t<F>*>(object))(
              std::forward<Arguments>(arguments)...);
        }) {}
  // NOLINTEND(google-explicit-constructor,bugprone-forwarding-reference-overload)

  Result operator()(Arguments... arguments) const {
    return call_(object_, std::forward<Arguments>(arguments)...);
  }

 private:
  void* object_;
  Result (*call_)(void*, Arguments...);
};

}  // namespace whet::detail
