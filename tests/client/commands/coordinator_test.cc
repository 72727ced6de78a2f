#include "commands/coordinator.h"

#include <gtest/gtest.h>

#include "fake_studies.h"
#include "link/clock.h"

namespace drover::commands {
namespace {

TEST(Coordinator, AsksMeanwhileBeforeEachRepetition) {
  FakeCoordinator fake;
  const link::RealClock clock;
  const Interruption interruption;
  int times = 0;
  const auto coordinator = Coordinator::at(fake.address(), clock, interruption, absl::Minutes(1), [&] {
    if (++times == 2) fake.serve();
    return absl::OkStatus();
  });
  ASSERT_TRUE(coordinator.ok()) << coordinator.status();
  EXPECT_TRUE((*coordinator)->list().ok());
  EXPECT_GE(times, 2);
}

TEST(Coordinator, EndsWithTheErrorOfMeanwhile) {
  const FakeCoordinator fake;
  const link::RealClock clock;
  const Interruption interruption;
  const auto coordinator = Coordinator::at(fake.address(), clock, interruption, absl::Minutes(1),
                                           [] { return absl::AbortedError("it will not run"); });
  ASSERT_TRUE(coordinator.ok());
  EXPECT_EQ((*coordinator)->list().status().message(), "it will not run");
}

TEST(Coordinator, AnInterruptionEndsTheWaiting) {
  const FakeCoordinator fake;
  const link::RealClock clock;
  Interruption interruption;
  interruption.happen();
  const auto coordinator = Coordinator::at(fake.address(), clock, interruption, absl::Hours(1));
  ASSERT_TRUE(coordinator.ok());
  EXPECT_TRUE(absl::IsUnavailable((*coordinator)->list().status()));
}

}  // namespace
}  // namespace drover::commands
