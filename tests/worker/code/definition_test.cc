#include "code/definition.h"

#include <gtest/gtest.h>

#include <filesystem>
#include <random>

#include "code/catalogue.h"
#include "worker/code/code_folder.h"

namespace drover::code {
namespace {

std::string refusal(const CodeFolder& folder) {
  const absl::Status status = read_definition(folder.path()).status();
  EXPECT_FALSE(status.ok());
  return std::string(status.message());
}

TEST(Definition, IsReadWhole) {
  const CodeFolder folder;
  const auto read = read_definition(folder.path());
  ASSERT_TRUE(read.ok()) << read.status();
  EXPECT_EQ(read->name, "hill");
  EXPECT_EQ(read->command.front(), std::filesystem::canonical(folder.path()).string() + "/hill.sh");
  EXPECT_EQ(read->time_limit, absl::Hours(2));
  EXPECT_EQ(read->grace, absl::Seconds(30));
  EXPECT_EQ(read->digest.size(), 64u);
  const v1::CodeDefinition shown = read->to_proto();
  EXPECT_EQ(shown.accepts(0).unit(), "mm");
  EXPECT_EQ(shown.accepts(1).choices_size(), 2);
  EXPECT_EQ(shown.outputs(0).unit(), "m");
  EXPECT_EQ(shown.time_limit().seconds(), 7200);
}

TEST(Definition, HasADigestOfAllThatDecidesWhatRuns) {
  const CodeFolder folder;
  const std::string before = read_definition(folder.path())->digest;
  EXPECT_EQ(read_definition(folder.path())->digest, before);
  folder.write("notes.txt", "of no matter");
  EXPECT_EQ(read_definition(folder.path())->digest, before);
  folder.write("mesh.dat", "1 2 4\n");
  const std::string other_mesh = read_definition(folder.path())->digest;
  EXPECT_NE(other_mesh, before);
  folder.write("deck.txt.in", "X [=x=] KIND [=kind=]\n");
  EXPECT_NE(read_definition(folder.path())->digest, other_mesh);
}

struct Wrong {
  const char* what;
  const char* old_text;
  const char* new_text;
  const char* message;  // with its place after "code.toml:"
};

class WrongDefinition : public testing::TestWithParam<Wrong> {};

TEST_P(WrongDefinition, IsRefusedAtItsPlace) {
  const CodeFolder folder;
  folder.replace(GetParam().old_text, GetParam().new_text);
  const std::string message = refusal(folder);
  EXPECT_NE(message.find(std::string("code.toml:") + GetParam().message), std::string::npos) << message;
}

const Wrong kWrong[] = {
    {"unknown_key", "version", "vresion", "3:1: unknown key vresion in [code]; did you mean version?"},
    {"no_time_limit", "time_limit = \"2h\"\n", "", "1:1: [code] has no time_limit"},
    {"no_span", "\"2h\"", "\"2 weeks\"", "5:14: time_limit = \"2 weeks\" is no span of time"},
    {"wrong_type", "\"hill\"", "7", "2:8: name must be a text"},
    {"missing_program", "hill.sh", "hull.sh", "4:11: program hull.sh is not there"},
    {"climbing_name", "\"deck.txt\"\nformats", "\"../deck.txt\"\nformats",
     "20:10: writes = \"../deck.txt\" must be a name inside"},
    {"bad_format", "%10.3e", "%s", "21:28: format \"%s\" is not one conversion"},
    {"no_template", "deck.txt.in", "dack.txt.in", "19:12: template dack.txt.in is not in"},
    {"no_reader", "after = \"HEIGHT =\"\n", "", "23:1: output height needs either after"},
    {"unknown_choice_text", "flat = \"F\"", "flot = \"F\"", "16:24: texts: kind has no choice flot"},
    {"exit_code", "[healthy]", "[healthy]\nexit_codes = [300]", "30:14: exit code 300"},
    {"malformed", "name = \"x\"", "name = = \"x\"", "10:"},
};

INSTANTIATE_TEST_SUITE_P(Table, WrongDefinition, testing::ValuesIn(kWrong),
                         [](const auto& row) { return row.param.what; });

TEST(Definition, SaysEverythingThatIsWrongAtOnce) {
  const CodeFolder folder;
  folder.replace("version", "vresion");
  folder.replace("%10.3e", "%s");
  const std::string message = refusal(folder);
  EXPECT_NE(message.find("vresion"), std::string::npos);
  EXPECT_NE(message.find("%s"), std::string::npos);
}

TEST(Definition, NamesTheMarkThatNoInputHasWithItsPlaceInTheTemplate) {
  const CodeFolder folder;
  folder.write("deck.txt.in", "X [=x=]\nKIND [=kind=]\nY [=knid=]\n");
  EXPECT_NE(refusal(folder).find("deck.txt.in:3:3: [=knid=]: the code accepts no knid; did you mean kind?"),
            std::string::npos);
}

TEST(Definition, NamesTheInputThatNoTemplateUses) {
  const CodeFolder folder;
  folder.write("deck.txt.in", "X [=x=]\n");
  EXPECT_NE(refusal(folder).find("input kind is accepted, and no template has a mark for it"), std::string::npos);
}

TEST(Definition, ThatOthersCanWriteIsRefused) {
  const CodeFolder folder;
  std::filesystem::permissions(folder.path() + "/code.toml", std::filesystem::perms::others_write,
                               std::filesystem::perm_options::add);
  EXPECT_NE(refusal(folder).find("chmod go-w"), std::string::npos);
}

TEST(Definition, OfRandomBytesIsAnErrorAndNoCrash) {
  const CodeFolder folder;
  const std::string good = folder.read("code.toml");
  std::mt19937 random(11);
  for (int n = 0; n < 2000; ++n) {
    std::string text = good;
    for (int changes = 0; changes < 3; ++changes) text[random() % text.size()] = static_cast<char>(random() % 256);
    folder.write("code.toml", text);
    static_cast<void>(read_definition(folder.path()));
  }
}

TEST(Catalogue, ShowsTheGoodOnesBesideTheBad) {
  const CodeFolder folder;
  const std::string root = folder.path() + "/codes";
  for (const char* const name : {"a", "b", "c"}) {
    std::filesystem::create_directories(root + "/" + name);
    for (const char* const file : {"code.toml", "deck.txt.in", "mesh.dat", "hill.sh"}) {
      std::filesystem::copy(folder.path() + "/" + file, root + "/" + name + "/" + file);
    }
  }
  folder.write("codes/b/code.toml", "[code]\n");
  const auto catalogue = read_catalogue(root);
  ASSERT_TRUE(catalogue.ok());
  ASSERT_EQ(catalogue->codes.size(), 1u) << "a; c has the same name";
  EXPECT_EQ(catalogue->problems.size(), 2u);
  EXPECT_NE(catalogue->find("hill"), nullptr);
  EXPECT_TRUE(absl::IsNotFound(read_catalogue(folder.path() + "/nowhere").status()));
}

}  // namespace
}  // namespace drover::code
