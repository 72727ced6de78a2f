#include "places.h"

#include <gtest/gtest.h>

#include <cstdlib>
#include <string>

namespace drover {
namespace {

TEST(WorkerName, MustFitIntoAPath) {
  for (const char* name : {"a", "node-3", "node_3.cluster", "0"}) EXPECT_TRUE(check_worker_name(name).ok()) << name;
  for (const std::string& name : {std::string(), std::string("."), std::string(".."), std::string("-a"),
                                  std::string("a/b"), std::string("a b"), std::string("a\n"), std::string(65, 'a')}) {
    EXPECT_EQ(check_worker_name(name).code(), absl::StatusCode::kInvalidArgument) << name;
  }
}

TEST(DefaultSpool, LiesInTheUsersStateFolder) {
  const char* const state = std::getenv("XDG_STATE_HOME");
  const char* const home = std::getenv("HOME");
  const std::string state_before = state == nullptr ? "" : state, home_before = home == nullptr ? "" : home;
  setenv("XDG_STATE_HOME", "/var/state", 1);
  EXPECT_EQ(default_spool("a").value(), "/var/state/drover/worker-a");
  setenv("XDG_STATE_HOME", "relative", 1);
  setenv("HOME", "/home/u", 1);
  EXPECT_EQ(default_spool("a").value(), "/home/u/.local/state/drover/worker-a");
  unsetenv("XDG_STATE_HOME");
  unsetenv("HOME");
  EXPECT_EQ(default_spool("a").status().code(), absl::StatusCode::kFailedPrecondition);
  if (state != nullptr) setenv("XDG_STATE_HOME", state_before.c_str(), 1);
  if (home != nullptr) setenv("HOME", home_before.c_str(), 1);
}

TEST(SisterProgram, IsBesideThisOneOrMissing) {
  EXPECT_EQ(sister_program("drover-runner").value(), std::string(DROVER_BIN) + "/drover-runner");
  EXPECT_EQ(sister_program("drover-nothing").status().code(), absl::StatusCode::kNotFound);
}

}  // namespace
}  // namespace drover
