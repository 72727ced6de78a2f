#include "commands/exit_code.h"

#include <gtest/gtest.h>

namespace drover::commands {
namespace {

TEST(ExitCode, IsOneOfFourForEveryStatus) {
  for (int code = 0; code <= 16; ++code) {
    const absl::Status status(static_cast<absl::StatusCode>(code), "x");
    const int exit = static_cast<int>(exit_for(status));
    EXPECT_GE(exit, 0);
    EXPECT_LE(exit, 3);
    EXPECT_EQ(exit == 0, status.ok()) << status;
  }
  EXPECT_EQ(exit_for(absl::NotFoundError("x")), Exit::kWrongInput);
  EXPECT_EQ(exit_for(absl::UnavailableError("x")), Exit::kUnreachable);
  EXPECT_EQ(exit_for(absl::FailedPreconditionError("x")), Exit::kNo);
}

}  // namespace
}  // namespace drover::commands
