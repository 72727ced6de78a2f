#include "process/identity.h"

#include <gtest/gtest.h>
#include <sys/wait.h>
#include <unistd.h>

namespace drover::process {
namespace {

TEST(Identity, IsPidAndStartTime) {
  const ProcessIdentity self = stat_of(getpid())->identity;
  EXPECT_TRUE(is_alive(self));
  EXPECT_FALSE(is_alive({self.pid, self.start + 1})) << "a stranger with our number";
  EXPECT_FALSE(is_alive({0, 0}));
}

TEST(Identity, OfAZombieIsDead) {
  const pid_t child = fork();
  if (child == 0) _exit(0);
  siginfo_t info{};
  waitid(P_PID, static_cast<id_t>(child), &info, WEXITED | WNOWAIT);
  EXPECT_FALSE(is_alive(stat_of(child)->identity));
  waitpid(child, nullptr, 0);
  EXPECT_FALSE(stat_of(child).has_value());
}

TEST(Identity, OfTheBootIsTheKernels) { EXPECT_EQ(boot_id().size(), 36u); }

}  // namespace
}  // namespace drover::process
