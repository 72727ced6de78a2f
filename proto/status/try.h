// Hands an error on: the two macros that all our code shares, and no others.
//
//   DROVER_TRY(expression)           expression is an absl::Status; returns it from the caller unless it is OK.
//   DROVER_ASSIGN(left, expression)  expression is an absl::StatusOr<T>; returns its status unless it is OK, else
//                                    `left` (a declaration or a place) takes its value.
#pragma once

#include <utility>

#include "absl/status/status.h"
#include "absl/status/statusor.h"

#define DROVER_TRY(expression)                          \
  do {                                                  \
    if (absl::Status try_status_ = (expression); !try_status_.ok()) return try_status_; \
  } while (false)

#define DROVER_JOIN_(a, b) a##b
#define DROVER_JOIN(a, b) DROVER_JOIN_(a, b)
#define DROVER_ASSIGN(left, expression) DROVER_ASSIGN_(DROVER_JOIN(assign_result_, __LINE__), left, expression)
#define DROVER_ASSIGN_(result, left, expression)            \
  auto result = (expression);                               \
  if (!result.ok()) return std::move(result).status();      \
  left = *std::move(result)
