#include "code/reader.h"

#include <gtest/gtest.h>

#include <filesystem>

#include "absl/time/clock.h"
#include "worker/code/code_folder.h"

namespace drover::code {
namespace {

class Reader : public testing::Test {
 protected:
  absl::StatusOr<double> read(const std::string& text, OutputReader output) {
    folder_.write("report.txt", text);
    output.file = "report.txt";
    return read_output(output, folder_.path(), absl::UnixEpoch());
  }
  absl::StatusOr<double> after(const std::string& text, const std::string& mark, int match = 1) {
    return read(text, {.after = mark, .match = match});
  }
  CodeFolder folder_;
};

TEST_F(Reader, TakesTheFirstNumberAfterAText) {
  EXPECT_EQ(*after("POWER 5.1E+02 KW\n", "POWER"), 510.0);
  EXPECT_EQ(*after("PEAK PRESSURE (MPA): = 3.5\r\n", "PEAK PRESSURE"), 3.5);
  EXPECT_EQ(*after("a=1 b=2 a=3", "a=", 2), 3.0);
  EXPECT_EQ(*after("RESULT\n   1.0D-02\n", "RESULT"), 0.01) << "on the next line";
  EXPECT_EQ(*after("node info nano 7", "node"), 7.0) << "words are no numbers";
}

TEST_F(Reader, SaysWhatItFoundInstead) {
  EXPECT_EQ(after("nothing", "POWER").status().message(), "\"POWER\" is not in report.txt");
  EXPECT_NE(after("POWER one", "POWER", 2).status().message().find("1 times, number 2 is wanted"),
            absl::string_view::npos);
  EXPECT_NE(after("POWER none\n", "POWER").status().message().find("stands \" none\""), absl::string_view::npos);
  EXPECT_TRUE(absl::IsOutOfRange(after("POWER = *****", "POWER").status()));
  EXPECT_TRUE(absl::IsOutOfRange(after("POWER = NaN", "POWER").status()));
  EXPECT_TRUE(absl::IsOutOfRange(after("POWER = -Infinity", "POWER").status()));
}

TEST_F(Reader, TakesAFieldOfALine) {
  const std::string table = "time force\n0.0  1.5\r\n0.1, 2.5\n";
  EXPECT_EQ(*read(table, {.line = 2, .column = 2}), 1.5);
  EXPECT_EQ(*read(table, {.line = 3, .column = 2}), 2.5);
  EXPECT_TRUE(absl::IsInvalidArgument(read(table, {.line = 1, .column = 1}).status()));
  EXPECT_EQ(read(table, {.line = 9, .column = 1}).status().message(), "report.txt has 3 lines, line 9 is wanted");
  EXPECT_NE(read(table, {.line = 2, .column = 3}).status().message().find("has 2 fields"), absl::string_view::npos);
}

TEST_F(Reader, RefusesAFileThatIsOlderThanTheRun) {
  folder_.write("report.txt", "HEIGHT 1");
  const OutputReader output{.file = "report.txt", .after = "HEIGHT"};
  EXPECT_TRUE(read_output(output, folder_.path(), absl::Now()).ok());
  EXPECT_TRUE(absl::IsFailedPrecondition(read_output(output, folder_.path(), absl::Now() + absl::Minutes(1)).status()));
}

TEST_F(Reader, RefusesWhatIsNoFileOfTheRun) {
  const OutputReader output{.file = "report.txt", .after = "x"};
  EXPECT_EQ(read_output(output, folder_.path(), {}).status().message(), "the code wrote no file report.txt");
  std::filesystem::create_symlink("/etc/passwd", folder_.path() + "/report.txt");
  EXPECT_TRUE(absl::IsNotFound(read_output(output, folder_.path(), {}).status()));
}

TEST_F(Reader, GoesThroughALargeFile) {
  std::string text;
  for (int n = 0; n < 500'000; ++n) text += "step " + std::to_string(n) + " residual 1e-3\n";
  EXPECT_EQ(*after(text + "FINAL 42\n", "FINAL"), 42.0);
  EXPECT_EQ(*after(std::string(3'000'000, 'x') + "\nFINAL 43", "FINAL"), 43.0);
}

TEST_F(Reader, FindsTextsWithTheirLine) {
  folder_.write("report.txt", "fine\nFATAL: the pipe bursts\n");
  const FoundText found = find_text(folder_.path() + "/report.txt", {"NaN", "FATAL"});
  EXPECT_TRUE(found.found);
  EXPECT_EQ(found.line, 2);
  EXPECT_EQ(found.line_text, "FATAL: the pipe bursts");
  EXPECT_FALSE(find_text(folder_.path() + "/none.txt", {"FATAL"}).found);
}

}  // namespace
}  // namespace drover::code
