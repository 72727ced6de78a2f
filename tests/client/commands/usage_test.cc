#include <gmock/gmock.h>
#include <gtest/gtest.h>

#include "drover_call.h"

namespace drover::commands {
namespace {

using testing::HasSubstr;
using testing::StartsWith;

TEST(Usage, PrintsHelpWithAnExampleFirst) {
  const Answer answer = drover({"solo", "--help"});
  EXPECT_EQ(answer.exit, 0);
  EXPECT_THAT(answer.data, HasSubstr("Examples:\n  drover solo penstock.toml\n"));
  EXPECT_LT(answer.data.find("Examples:"), answer.data.find("Usage: drover solo"));
  EXPECT_EQ(answer.messages, "");
}

TEST(Usage, PrintsTheVersion) {
  EXPECT_EQ(drover({"--version"}).data, "drover 1.2.3\n");
  EXPECT_EQ(drover({"--version"}).exit, 0);
}

TEST(Usage, SaysTheNearestCommandAndOption) {
  const Answer command = drover({"shwo", "penstock"});
  EXPECT_EQ(command.exit, 2);
  EXPECT_EQ(command.messages, "drover: there is no command shwo; did you mean show?; see: drover --help\n");
  const Answer option = drover({"show", "penstock", "--jsn"});
  EXPECT_EQ(option.exit, 2);
  EXPECT_EQ(option.messages, "drover: there is no option --jsn; did you mean --json?; see: drover show --help\n");
  EXPECT_EQ(option.data, "");
}

TEST(Usage, AcceptsNoAbbreviations) {
  EXPECT_EQ(drover({"sho", "penstock"}).exit, 2);
  EXPECT_EQ(drover({"show", "penstock", "--js"}).exit, 2);
}

TEST(Usage, MissesWhatIsMandatory) {
  EXPECT_EQ(drover({}).exit, 2);
  EXPECT_EQ(drover({"show"}).exit, 2);
  EXPECT_THAT(drover({"show"}).messages, HasSubstr("STUDY"));
  EXPECT_EQ(drover({"solo", "a.toml", "--slots", "many"}).exit, 2);
  EXPECT_EQ(drover({"show", "a", "b"}).exit, 2);
}

TEST(Usage, RefusesAnAddressThatIsNone) {
  const Answer answer = drover({"list", "--coordinator", "nonsense"});
  EXPECT_EQ(answer.exit, 2);
  EXPECT_THAT(answer.messages, StartsWith("drover:"));
}

TEST(Usage, EveryCommandHasAHelp) {
  for (const char* command :
       {"check", "solo", "start", "list", "show", "best", "runs", "table", "pause", "resume", "stop"}) {
    const Answer answer = drover({command, "--help"});
    EXPECT_EQ(answer.exit, 0) << command;
    EXPECT_THAT(answer.data, HasSubstr(std::string("  drover ") + command)) << command;
    EXPECT_THAT(answer.data, HasSubstr("--json")) << command;
  }
}

}  // namespace
}  // namespace drover::commands
