#pragma once

#include "stillmass/base/error.hpp"

namespace stillmass::cli {

inline constexpr int done = 0;
inline constexpr int not_answered = 1;  ///< read, but the question cannot be answered from it
inline constexpr int wrong_usage = 2;
inline constexpr int wrong_file = 3;
inline constexpr int own_fault = 70;
inline constexpr int stopped = 130;  ///< by a signal, as shells say it

inline int exit_code(base::ErrorKind kind) {
  switch (kind) {
    case base::ErrorKind::usage:
      return wrong_usage;
    case base::ErrorKind::file:
      return wrong_file;
    case base::ErrorKind::internal:
      return own_fault;
  }
  return own_fault;
}

}  // namespace stillmass::cli
