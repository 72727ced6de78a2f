#include "studyfile/study_file.h"

#include <gmock/gmock.h>
#include <gtest/gtest.h>
#include <unistd.h>

#include <fstream>
#include <string>
#include <vector>

#include "google/protobuf/text_format.h"
#include "google/protobuf/util/message_differencer.h"

namespace drover::studyfile {
namespace {

std::string all_lines(const StudyFile& file) {
  std::string out;
  for (const Complaint& complaint : file.complaints) out += complaint.line() + "\n";
  return out;
}

v1::StudySpec spec_of(const std::string& text) {
  v1::StudySpec spec;
  EXPECT_TRUE(google::protobuf::TextFormat::ParseFromString(text, &spec));
  return spec;
}

void expect_spec(const StudyFile& file, const std::string& wanted) {
  ASSERT_EQ(all_lines(file), "");
  google::protobuf::util::MessageDifferencer differencer;
  std::string difference;
  differencer.ReportDifferencesToString(&difference);
  EXPECT_TRUE(differencer.Compare(spec_of(wanted), file.spec)) << difference;
}

TEST(StudyFile, ReadsEveryKey) {
  const StudyFile file = parse_study_file(R"(
[study]
name = "all"
code = "solver"
replicates = 3
priority = -2
tags = ["big", "fast"]
late = "refuse"
[[variable]]
name = "r"
kind = "real"
low = 1
high = 2.5
scale = "log"
unit = "m"
baseline = 2
[[variable]]
name = "t"
kind = "stepped"
low = 0.0
high = 10
step = 0.5
scale = "linear"
baseline = 5
[[variable]]
name = "i"
kind = "integer"
low = -3
high = 3
[[variable]]
name = "c"
kind = "choice"
choices = ["p", "q"]
baseline = "q"
[[condition]]
name = "flow"
unit = "m3/s"
values = [0.1, 2]
weights = [1, 0.5]
[[derived]]
name = "gain"
formula = "a * flow"
unit = "EUR"
[[objective]]
maximise = "gain"
across = "quantile"
quantile = 0.1
unit = "EUR"
[[objective]]
minimise = "a"
across = "each"
[[constraint]]
output = "p"
unit = "MPa"
at_most = 3
at_least = -1
allowance = 0.05
scale = 2
across = "mean"
[search]
method = "leapfrogging"
seed = 0
order = "candidate"
parallel = 4
look_ahead = 16
population = 20
tolerance = 0.01
share = 1
[budget]
runs = 400
deadline = 2027-01-15T18:00:00.25+01:00
)",
                                          "all.toml");
  expect_spec(file, R"(
    name: "all" codes { role: CODE_ROLE_FINE code: "solver" } replicates: 3 priority: -2 tags: "big" tags: "fast"
    late: LATE_REPORTS_REFUSE
    variables { name: "r" kind: VARIABLE_KIND_REAL low: 1 high: 2.5 scale: SCALE_LOG unit: "m" baseline: 2 }
    variables { name: "t" kind: VARIABLE_KIND_STEPPED low: 0 high: 10 step: 0.5 scale: SCALE_LINEAR baseline: 5 }
    variables { name: "i" kind: VARIABLE_KIND_INTEGER low: -3 high: 3 }
    variables { name: "c" kind: VARIABLE_KIND_CHOICE choices: "p" choices: "q" baseline_choice: "q" }
    conditions { name: "flow" unit: "m3/s" values: 0.1 values: 2 weights: 1 weights: 0.5 }
    derived { name: "gain" formula: "a * flow" unit: "EUR" }
    objectives { name: "gain" sense: SENSE_MAXIMISE across: ACROSS_QUANTILE quantile: 0.1 unit: "EUR" }
    objectives { name: "a" sense: SENSE_MINIMISE across: ACROSS_EACH }
    constraints { name: "p" unit: "MPa" at_most: 3 at_least: -1 allowance: 0.05 scale: 2 across: ACROSS_MEAN }
    search { method: "leapfrogging" seed: 0 order: ORDER_CANDIDATE parallel: 4 look_ahead: 16 population: 20
             tolerance: 0.01 share: 1 }
    budget { runs: 400 deadline { seconds: 1800032400 nanos: 250000000 } })");
}

TEST(StudyFile, LeavesOpenWhatTheAuthorLeftOut) {
  const StudyFile file = parse_study_file(
      "[study]\nname = 'n'\ncode = 'c'\n[[variable]]\nname = 'x'\nlow = 0\nhigh = 1\n[[objective]]\nminimise = 'y'\n",
      "f");
  expect_spec(file, R"(name: "n" codes { role: CODE_ROLE_FINE code: "c" } variables { name: "x" low: 0 high: 1 }
                       objectives { name: "y" sense: SENSE_MINIMISE })");
  EXPECT_FALSE(file.spec.search().has_seed());
  EXPECT_FALSE(file.spec.has_budget());
}

TEST(StudyFile, ReadsTheExampleOfThePenstock) {
  const auto file = read_study_file(DROVER_SOURCE "/docs/examples/penstock/study.toml");
  ASSERT_TRUE(file.ok()) << file.status();
  ASSERT_EQ(all_lines(*file), "");
  EXPECT_EQ(file->spec.name(), "penstock");
  EXPECT_EQ(file->spec.variables_size(), 5);
  EXPECT_EQ(file->spec.variables(2).baseline_choice(), "S235");
  EXPECT_EQ(file->spec.conditions(0).weights_size(), 3);
  EXPECT_EQ(file->spec.constraints_size(), 3);
  EXPECT_EQ(file->spec.constraints(2).at_least(), 10.0);
  EXPECT_EQ(file->spec.budget().runs(), 400);
}

TEST(StudyFile, ReadsTheExamplesOfItsReference) {
  std::ifstream in(DROVER_SOURCE "/docs/study-file.md");
  const std::string page((std::istreambuf_iterator<char>(in)), {});
  const std::string open = "```toml\n", close = "\n```";
  int count = 0;
  for (std::size_t at = page.find(open); at != std::string::npos; at = page.find(open, at)) {
    at += open.size();
    EXPECT_EQ(all_lines(parse_study_file(page.substr(at, page.find(close, at) - at), "docs")), "");
    ++count;
  }
  EXPECT_GE(count, 1);
}

TEST(StudyFile, SaysWhyAFileCannotBeRead) {
  std::string folder = testing::TempDir() + "/studyfileXXXXXX";
  ASSERT_NE(mkdtemp(folder.data()), nullptr);
  EXPECT_EQ(read_study_file(folder + "/none.toml").status().code(), absl::StatusCode::kNotFound);
  EXPECT_FALSE(read_study_file(folder).ok());
  const std::string large = folder + "/large.toml";
  std::ofstream(large) << std::string(kLargestFile + 10, '#');
  EXPECT_EQ(read_study_file(large).status().code(), absl::StatusCode::kInvalidArgument);
  unlink(large.c_str());
  rmdir(folder.c_str());
}

TEST(StudyFile, AcceptsWindowsLineEndsAndAByteOrderMark) {
  const StudyFile file = parse_study_file(
      "\xEF\xBB\xBF[study]\r\nname = 'n'\r\ncode = 'c'\r\n[[variable]]\r\nname = 'x'\r\nlow = 0\r\nhigh = 1\r\n"
      "[[objective]]\r\nminimise = 'y'\r\n",
      "f");
  EXPECT_EQ(all_lines(file), "");
}

// A generator of its own: the same mutations on every machine.
class Mutator {
 public:
  explicit Mutator(std::uint64_t seed) : state_(seed) {}
  std::size_t below(std::size_t count) {
    state_ = state_ * 6364136223846793005ull + 1442695040888963407ull;
    return static_cast<std::size_t>((state_ >> 33) % count);
  }
  std::string mutate(std::string text) {
    for (std::size_t i = 0, count = 1 + below(6); i < count; ++i) {
      const std::size_t at = below(text.size());
      switch (below(5)) {
        case 0:
          text[at] = static_cast<char>(below(256));
          break;
        case 1:
          text.erase(at, 1 + below(20));
          break;
        case 2:
          text.insert(at, text.substr(below(text.size()), below(40)));
          break;
        case 3:
          text.insert(at, 1, "[]{}=\"'.,\n#-+0e"[below(15)]);
          break;
        default:
          text.insert(at, std::vector<std::string>{"nan", "inf", "1979-05-27", "[[[", "\"\"\"", "0x", "9e999",
                                                   "a.b.c = 1\n", "true", "\n[search]\n"}[below(10)]);
      }
      if (text.empty()) return "x";
    }
    return text;
  }

 private:
  std::uint64_t state_;
};

TEST(StudyFile, SurvivesMutatedFiles) {
  std::ifstream in(DROVER_SOURCE "/docs/examples/penstock/study.toml");
  const std::string good((std::istreambuf_iterator<char>(in)), {});
  ASSERT_FALSE(good.empty());
  Mutator mutator(1);
  int wrong = 0, right = 0;
  for (int i = 0; i < 5'000; ++i) {
    const std::string text = mutator.mutate(good);
    const StudyFile file = parse_study_file(text, "f.toml");
    for (const Complaint& complaint : file.complaints) {
      EXPECT_GE(complaint.place.line, 1) << text;
      EXPECT_THAT(complaint.line(), testing::StartsWith("f.toml:"));
    }
    // What passes can be sent.
    if (file.complaints.empty()) {
      EXPECT_FALSE(file.spec.SerializeAsString().empty());
    }
    file.complaints.empty() ? ++right : ++wrong;
  }
  EXPECT_GT(wrong, 1'000);
  EXPECT_GT(right, 100);  // mutated comments, names and numbers
}

}  // namespace
}  // namespace drover::studyfile
