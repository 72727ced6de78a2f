// Wrong study files and every line that each of them must be answered with.
#include <gtest/gtest.h>

#include <ostream>
#include <string>

#include "studyfile/study_file.h"

namespace drover::studyfile {
namespace {

// Three good tables of 3, 4 and 2 lines; the tests put something wrong before, between or behind them.
const std::string kStudy = "[study]\nname = \"n\"\ncode = \"c\"\n";
const std::string kVariable = "[[variable]]\nname = \"x\"\nlow = 0\nhigh = 1\n";
const std::string kObjective = "[[objective]]\nminimise = \"y\"\n";

struct Row {
  const char* title;
  std::string file;
  std::string complaints;
};

void PrintTo(const Row& row, std::ostream* out) { *out << row.title; }

class WrongFile : public testing::TestWithParam<Row> {};

TEST_P(WrongFile, IsAnsweredWithEveryMistakeAtItsPlace) {
  std::string lines;
  for (const Complaint& complaint : parse_study_file(GetParam().file, "f").complaints) lines += complaint.line() + "\n";
  EXPECT_EQ(lines, GetParam().complaints);
}

const Row kRows[] = {
    {"UnknownKeyOutsideTables", "nmae = 1\n" + kStudy + kVariable + kObjective,
     "f:1:1: there is no key \"nmae\" in a study file; it may have study, variable, condition, derived, objective, "
     "constraint, search, budget\n"},
    {"UnknownTables", kStudy + kVariable + kObjective + "[study.extra]\nx = 1\n[serach]\nseed = 1\n",
     "f:10:8: there is no key \"extra\" in [study]; it may have name, code, replicates, priority, tags, late\n"
     "f:12:2: there is no key \"serach\" in a study file; did you mean \"search\"?\n"},
    {"EmptyFile", "",
     "f:1:1: the file has no study; add [study] with name = \"...\" and code = \"...\"\n"
     "f:1:1: the file has no variable; add [[variable]] with name, low and high\n"
     "f:1:1: the file has no objective; add [[objective]] with minimise = \"...\" or maximise = \"...\"\n"},
    {"StudyTable", "[study]\nnmae = \"n\"\ncode = 3\n" + kVariable + kObjective,
     "f:1:1: [study] has no name; add name = \"...\"\n"
     "f:2:1: there is no key \"nmae\" in [study]; did you mean \"name\"?\n"
     "f:3:8: code in [study] is an integer, where a text is wanted; write it in quotes: code = \"3\"\n"},
    {"StudySettings", kStudy + "replicates = 0\npriority = 1.0\ntags = \"a\"\nlate = true\n" + kVariable + kObjective,
     "f:4:14: replicates = 0 is below 1; write 1 or more\n"
     "f:5:12: priority in [study] is a number, where an integer is wanted; write digits only, such as priority = 1\n"
     "f:6:8: tags in [study] is a text, where a list of texts is wanted; write tags = [\"...\", \"...\"]\n"
     "f:7:8: late in [study] is a truth value, where a word is wanted; write \"accept\" or \"refuse\"\n"},
    {"SingleBrackets", kStudy + "[variable]\nname = \"x\"\nlow = 0\nhigh = 1\n" + kObjective,
     "f:4:1: variable is a table, where a list of tables is wanted; write [[variable]], in double brackets, once for "
     "each\n"},
    {"DoubleBrackets", "[[study]]\nname = \"n\"\ncode = \"c\"\n" + kVariable + kObjective,
     "f:1:1: study is a list, where a table is wanted; write [study] once, in single brackets\n"},
    {"ListsOfTheWrongThing", "variable = []\nobjective = [1]\n" + kStudy,
     "f:1:12: the list variable is empty; add at least one\n"
     "f:2:14: objective[0] is an integer, where a table is wanted; write [[objective]], in double brackets, once for "
     "each\n"},
    {"NumbersThatAreNone", kStudy + "[[variable]]\nname = \"x\"\nlow = \"0.3\"\nhigh = nan\n" + kObjective,
     "f:6:7: low in variable \"x\" is a text, where a number is wanted; write it without quotes: low = 0.3\n"
     "f:7:8: high = nan is no finite number; write a finite one\n"},
    {"UnknownKind", kStudy + "[[variable]]\nname = \"x\"\nlow = true\nhigh = inf\nkind = \"reel\"\n" + kObjective,
     "f:8:8: there is no kind = \"reel\"; did you mean \"real\"? write \"real\" or \"stepped\" or \"integer\" or "
     "\"choice\"\n"},
    {"SteppedWithoutStep", kStudy + "[[variable]]\nname = \"x\"\nkind = \"stepped\"\n" + kObjective,
     "f:4:1: variable \"x\" has no low; add low = NUMBER\n"
     "f:4:1: variable \"x\" has no high; add high = NUMBER\n"
     "f:4:1: variable \"x\" has no step; add step = 0.5\n"},
    {"StepOfNothing",
     kStudy + "[[variable]]\nname = \"x\"\nkind = \"stepped\"\nlow = 0\nhigh = 1\nstep = 0\n" + kObjective,
     "f:9:8: step = 0 is not above 0; write a number above 0\n"},
    {"ChoiceWithNumbers",
     kStudy + "[[variable]]\nname = \"x\"\nkind = \"choice\"\nlow = 1\nstep = 2\nbaseline = 3\n" + kObjective,
     "f:4:1: variable \"x\" has no choices; add choices = [\"...\", \"...\"]\n"
     "f:7:7: variable \"x\" is a choice, and has no low; leave low out, or change its kind\n"
     "f:8:8: variable \"x\" is a choice, and has no step; leave step out, or change its kind\n"
     "f:9:12: baseline in variable \"x\" is an integer, where a text is wanted; write it in quotes: baseline = "
     "\"3\"\n"},
    {"NumberWithChoices",
     kStudy + "[[variable]]\nname = \"x\"\nlow = 1\nhigh = 2\nstep = 2\nchoices = [\"a\"]\nbaseline = \"a\"\n" +
         "scale = \"lin\"\n" + kObjective,
     "f:8:8: variable \"x\" is not stepped, and has no step; add kind = \"stepped\", or leave step out\n"
     "f:9:11: variable \"x\" is no choice, and has no choices; add kind = \"choice\", or leave choices out\n"
     "f:10:12: baseline in variable \"x\" is a text, where a number is wanted; write a number, such as baseline = 1.5\n"
     "f:11:9: there is no scale = \"lin\"; write \"linear\" or \"log\"\n"},
    {"ChoicesThatAreNoTexts",
     kStudy + "[[variable]]\nname = \"x\"\nkind = \"choice\"\nchoices = [\"a\", 3]\n" + kObjective,
     "f:7:17: 3 in choices is an integer, where a text is wanted; write it in quotes: \"3\"\n"},
    {"Conditions",
     kStudy + kVariable + kObjective +
         "[[condition]]\nname = \"q\"\nvalues = 3\nweights = []\n[[condition]]\nvalues = [1, \"a\", nan]\n",
     "f:12:10: values in condition \"q\" is an integer, where a list of numbers is wanted; write values = [3]\n"
     "f:13:11: weights is an empty list; leave weights out: all alike\n"
     "f:14:1: [[condition]] has no name; add name = \"...\", as the code's definition accepts it\n"
     "f:15:14: 'a' in values is a text, where a number is wanted\n"
     "f:15:19: nan in values is no finite number; write a finite one\n"},
    {"Derived", kStudy + kVariable + kObjective + "[[derived]]\nname = 3\n",
     "f:10:1: [[derived]] has no formula; add formula = \"...\", of outputs, variables, conditions and earlier derived "
     "numbers\n"
     "f:11:8: name in [[derived]] is an integer, where a text is wanted; write it in quotes: name = \"3\"\n"},
    {"BothSenses", kStudy + kVariable + "[[objective]]\nminimise = \"y\"\nmaximise = \"z\"\n",
     "f:10:12: an objective has minimise or maximise, not both; write two [[objective]] tables\n"},
    {"NoSense", kStudy + kVariable + "[[objective]]\nminimize = \"q\"\n",
     "f:8:1: [[objective]] does not say what is wanted; add minimise = \"...\" or maximise = \"...\", with the name of "
     "an output or a derived number\n"
     "f:9:1: there is no key \"minimize\" in [[objective]]; did you mean \"minimise\"?\n"},
    {"Quantiles",
     kStudy + kVariable + kObjective + "quantile = 0.1\n[[objective]]\nminimise = \"y\"\nacross = \"quantile\"\n" +
         "[[objective]]\nminimise = \"\"\nacross = \"quantile\"\nquantile = 1\n",
     "f:10:12: a quantile goes with across = \"quantile\" only; add across = \"quantile\", or leave quantile out\n"
     "f:11:1: objective \"y\" has no quantile; add quantile = 0.1: one tenth of the conditions, by weight, may be as "
     "bad or worse\n"
     "f:15:12: minimise in [[objective]] is empty; write a text, or leave minimise out\n"
     "f:17:12: quantile = 1 is not between 0 and 1; write a share above 0 and below 1\n"},
    {"Constraints",
     kStudy + kVariable + kObjective +
         "[[constraint]]\noutput = \"p\"\nallowance = 1.5\nscale = 0\nacross = \"each\"\n[[constraint]]\nat_mots = 1\n",
     "f:10:1: constraint \"p\" has no limit; add at_most = NUMBER, at_least = NUMBER or both\n"
     "f:12:13: allowance = 1.5 is not in [0, 1); write the share of the limit that is kept back, such as 0.05\n"
     "f:13:9: scale = 0 is not above 0; write a number above 0, or leave it out: the limit's size\n"
     "f:14:10: there is no across = \"each\"; write \"mean\" or \"worst\"\n"
     "f:15:1: [[constraint]] has no output; add output = \"...\", with the name of an output or a derived number\n"
     "f:15:1: [[constraint]] has no limit; add at_most = NUMBER, at_least = NUMBER or both\n"
     "f:16:1: there is no key \"at_mots\" in [[constraint]]; did you mean \"at_most\"?\n"},
    {"Search",
     kStudy + kVariable + kObjective +
         "[search]\nseed = -1\nparallel = 2.5\nlook_ahead = 4\ntolerance = 2\norder = \"completion\"\n",
     "f:11:8: seed = -1 is below 0; write 0 or more\n"
     "f:12:12: parallel in [search] is a number, where an integer is wanted; write digits only, such as parallel = 1\n"
     "f:13:14: look_ahead goes with order = \"candidate\" only; add order = \"candidate\", or leave look_ahead out\n"
     "f:14:13: tolerance = 2 is not above 0 and at most 1; write a share, or leave tolerance out: the method's "
     "default\n"},
    {"MisspeltOrder", kStudy + kVariable + kObjective + "[search]\norder = \"candidates\"\nlook_ahead = 4\n",
     "f:11:9: there is no order = \"candidates\"; did you mean \"candidate\"? write \"completion\" or \"candidate\"\n"},
    {"LocalDeadline", kStudy + kVariable + kObjective + "[budget]\nruns = 0\ndeadline = 2027-01-15T18:00:00\n",
     "f:11:8: runs = 0 is below 1; write 1 or more\n"
     "f:12:12: deadline = 2027-01-15T18:00:00 does not say in which time zone; add Z for UTC, or an offset: "
     "2027-01-15T18:00:00Z or 2027-01-15T18:00:00+01:00\n"},
    {"QuotedBudget",
     kStudy + kVariable + kObjective + "[budget]\nruns = \"400\"\ndeadline = \"2027-01-15T18:00:00Z\"\n",
     "f:11:8: runs in [budget] is a text, where an integer is wanted; write it without quotes: runs = 400\n"
     "f:12:12: deadline in [budget] is a text, where a date with a time is wanted; write it without quotes, with Z or "
     "an offset: deadline = 2027-01-15T18:00:00Z\n"},
    {"DateWithoutTime", kStudy + kVariable + kObjective + "[budget]\ndeadline = 2027-01-15\nlimit = 3\n",
     "f:11:12: deadline in [budget] is a date, where a date with a time is wanted; write it without quotes, with Z or "
     "an offset: deadline = 2027-01-15T18:00:00Z\n"
     "f:12:1: there is no key \"limit\" in [budget]; it may have runs, deadline\n"},
    {"BrokenTableHead", kStudy + kVariable + kObjective + "[budget\nruns = 3\n",
     "f:10:8: this is no TOML: table header: expected ']', saw '\\n'; correct this place; texts stand in double "
     "quotes, tables begin with [name] or [[name]]\n"},
    {"KeyGivenTwice", kStudy + kVariable + kObjective + "[budget]\nruns = 3\nruns = 4\n",
     "f:12:8: this is no TOML: key-value pair: cannot redefine existing integer 'runs'; correct this place; texts "
     "stand in double quotes, tables begin with [name] or [[name]]\n"},
};

INSTANTIATE_TEST_SUITE_P(Table, WrongFile, testing::ValuesIn(kRows),
                         [](const testing::TestParamInfo<Row>& row) { return std::string(row.param.title); });

}  // namespace
}  // namespace drover::studyfile
