#include "studyfile/source_map.h"

#include <gtest/gtest.h>

#include "studyfile/study_file.h"

namespace drover::studyfile {
namespace {

const char kFile[] =
    "[study]\n"
    "name = \"a\"\n"
    "code = \"b\"\n"
    "\n"
    "[[variable]]\n"
    "name = \"x\"\n"
    "low  = 1\n"
    "high = 2\n"
    "[[variable]]\n"
    "name    = \"s\"\n"
    "kind    = \"choice\"\n"
    "choices = [\"p\", \"q\"]\n"
    "[[objective]]\n"
    "maximise = \"gain\"\n";

TEST(SourceMap, KnowsWhereEveryValueStands) {
  const StudyFile file = parse_study_file(kFile, "f.toml");
  ASSERT_TRUE(file.complaints.empty()) << file.complaints.front().line();
  EXPECT_EQ(file.places.find("study.code"), (Place{3, 8}));
  EXPECT_EQ(file.places.find("variable[0].low"), (Place{7, 8}));
  EXPECT_EQ(file.places.find("variable[1].choices"), (Place{12, 11}));
  EXPECT_EQ(file.places.find("variable[1].choices[1]"), (Place{12, 17}));
  EXPECT_EQ(file.places.find("objective[0].maximise"), (Place{14, 12}));
}

TEST(SourceMap, AnswersWithTheNearestParentForWhatIsNotThere) {
  const StudyFile file = parse_study_file(kFile, "f.toml");
  EXPECT_EQ(file.places.find("variable[1].low"), (Place{9, 1}));
  EXPECT_EQ(file.places.find("variable[7].low"), (Place{5, 1}));
  EXPECT_EQ(file.places.find("objective[0].unit.deeper[3]"), (Place{13, 1}));
  EXPECT_EQ(file.places.find("constraint[0].output"), (Place{0, 0}));
  EXPECT_EQ(file.places.find(""), (Place{0, 0}));
}

TEST(SourceMap, ShowsAProblemOfTheCoordinatorAtItsPlace) {
  const StudyFile file = parse_study_file(kFile, "f.toml");
  v1::Problem problem;
  problem.set_field("study.code");
  problem.set_text("code \"b\" is not known");
  problem.set_advice("known codes: \"bb\"");
  problem.set_nearest("bb");
  EXPECT_EQ(file.places.locate(problem, "f.toml").line(),
            "f.toml:3:8: code \"b\" is not known; did you mean \"bb\"? known codes: \"bb\"");
  problem.set_field("budget.deadline");
  problem.clear_nearest();
  EXPECT_EQ(file.places.locate(problem, "f.toml").line(), "f.toml: code \"b\" is not known; known codes: \"bb\"");
}

TEST(Complaint, ShowsControlCharactersAsEscapes) {
  const Complaint complaint{
      .file = "f", .place = {1, 2}, .field = "", .text = "a\x1b[31m\nb", .advice = "", .nearest = ""};
  EXPECT_EQ(complaint.line().find('\x1b'), std::string::npos);
  EXPECT_EQ(complaint.line().find('\n'), std::string::npos);
}

}  // namespace
}  // namespace drover::studyfile
