#include "link/log.h"

#include <gtest/gtest.h>

#include <cstdlib>
#include <regex>
#include <string>

#include "spdlog/spdlog.h"

namespace drover::link {
namespace {

// What `say` makes the log write to stderr.
template <class Say>
std::string written_by(Say say) {
  ::testing::internal::CaptureStderr();
  say();
  spdlog::default_logger()->flush();
  return ::testing::internal::GetCapturedStderr();
}

TEST(Log, WritesOneLineAnEventWithUtcTime) {
  unsetenv("DROVER_LOG");
  start_log("test-log");
  const std::string line = written_by([] { spdlog::info("run done run={} study={}", 41, "penstock"); });
  EXPECT_TRUE(std::regex_match(
      line, std::regex("\\d{4}-\\d{2}-\\d{2}T\\d{2}:\\d{2}:\\d{2}\\.\\d{3}Z info run done run=41 study=penstock\n")))
      << line;
}

TEST(Log, ShowsControlCharactersAsEscapes) {
  unsetenv("DROVER_LOG");
  start_log("test-log");
  const std::string line = written_by([] { spdlog::warn("said {}", "a\nb\x1b[2J"); });
  EXPECT_NE(line.find("warning said a\\x0ab\\x1b[2J\n"), std::string::npos) << line;
}

TEST(Log, LetsTheEnvironmentChooseTheLevel) {
  setenv("DROVER_LOG", "error", 1);
  start_log("test-log", LogLevel::kDebug);
  EXPECT_EQ(written_by([] { spdlog::warn("quiet"); }), "");
  setenv("DROVER_LOG", "debug", 1);
  start_log("test-log", LogLevel::kError);
  EXPECT_NE(written_by([] { spdlog::debug("heard"); }), "");
  setenv("DROVER_LOG", "loud", 1);
  start_log("test-log", LogLevel::kInfo);
  EXPECT_EQ(written_by([] { spdlog::debug("quiet"); }), "");
  unsetenv("DROVER_LOG");
  start_log("test-log");
}

}  // namespace
}  // namespace drover::link
