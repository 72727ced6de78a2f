#include "worker/code/code_folder.h"

#include <gtest/gtest.h>

#include <cstdlib>
#include <filesystem>
#include <fstream>
#include <sstream>

namespace drover::code {
namespace {

constexpr char kDefinition[] = R"([code]
name = "hill"
version = "1"
command = ["hill.sh", "deck.txt"]
time_limit = "2h"
files = ["mesh.dat"]
environment = { SOLVER = "fast" }

[[accepts]]
name = "x"
unit = "mm"

[[accepts]]
name = "kind"
choices = ["steep", "flat"]
texts = { steep = "S", flat = "F" }

[[input]]
template = "deck.txt.in"
writes = "deck.txt"
formats = { x = { format = "%10.3e", width = 10 } }

[[output]]
name = "height"
unit = "m"
file = "report.txt"
after = "HEIGHT ="

[healthy]
absent = ["FATAL"]
)";

}  // namespace

CodeFolder::CodeFolder() {
  path_ = (std::filesystem::temp_directory_path() / "drover-code-XXXXXX").string();
  if (mkdtemp(path_.data()) == nullptr) std::abort();
  write("code.toml", kDefinition);
  write("deck.txt.in", "X    [=x=]\nKIND [=kind=]\n");
  write("mesh.dat", "1 2 3\n");
  write("hill.sh", "#!/bin/sh\n", true);
}

CodeFolder::~CodeFolder() {
  std::error_code ignored;
  std::filesystem::remove_all(path_, ignored);
}

std::string CodeFolder::work() const {
  const std::string folder = path_ + "/work" + std::to_string(++works_);
  std::filesystem::create_directory(folder);
  return folder;
}

void CodeFolder::write(const std::string& name, const std::string& text, bool executable) const {
  std::ofstream(path_ + "/" + name, std::ios::binary) << text;
  using std::filesystem::perms;
  std::filesystem::permissions(path_ + "/" + name,
                               perms::owner_read | perms::owner_write | (executable ? perms::owner_exec : perms::none));
}

std::string CodeFolder::read(const std::string& name) const {
  std::ostringstream text;
  text << std::ifstream(path_ + "/" + name, std::ios::binary).rdbuf();
  return text.str();
}

void CodeFolder::replace(const std::string& old_text, const std::string& new_text) const {
  std::string text = read("code.toml");
  const std::size_t at = text.find(old_text);
  ASSERT_NE(at, std::string::npos) << old_text;
  write("code.toml", text.replace(at, old_text.size(), new_text));
}

}  // namespace drover::code
