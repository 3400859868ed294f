#pragma once
/// The exceptions of whet and the one way their messages are composed.

#include <stdexcept>
#include <string>

#include <whet/support/text.hpp>

namespace whet {

/// The base of every exception that whet throws. Its message says where, what, the value got, the
/// value expected, and what to do.
class Error : public std::runtime_error {
 public:
  using std::runtime_error::runtime_error;
};

/// A parameter, its name, its value or its part in an information is wrong.
class ParameterError : public Error {
 public:
  using Error::Error;
};

/// An observable failed, or returned what is no data vector.
class ObservableError : public Error {
 public:
  using Error::Error;
};

/// A covariance, a noise level or a given information matrix is not what it must be.
class CovarianceError : public Error {
 public:
  using Error::Error;
};

/// A derivative does not exist, or could not be determined where it matters.
class DerivativeError : public Error {
 public:
  using Error::Error;
};

/// A file is missing, damaged, inconsistent or of a version not known.
class FileError : public Error {
 public:
  using Error::Error;
};

namespace detail {

/// The five parts of a message; empty ones are left out.
struct Complaint {
  std::string where{};     ///< the function or type the user called
  std::string what{};      ///< the parameter, element or field
  std::string got{};       ///< the value found
  std::string expected{};  ///< the value that would have been right
  std::string advice{};    ///< what to do, a sentence
};

[[nodiscard]] inline std::string message(const Complaint& complaint) {
  std::string all = complaint.where + ": " + complaint.what;
  if (!complaint.got.empty()) all += ": got " + complaint.got;
  if (!complaint.expected.empty()) {
    all += (complaint.got.empty() ? ": expected " : ", expected ") + complaint.expected;
  }
  if (!complaint.advice.empty()) all += ". " + complaint.advice;
  return all;
}

/// Throw E with the message composed of the five parts.
template <class E>
[[noreturn]] void fail(const Complaint& complaint) {
  throw E(message(complaint));
}

}  // namespace detail
}  // namespace whet
