// A folder for a code definition and its runs, removed with it.
#pragma once

#include <string>

namespace drover::code {

class CodeFolder {
 public:
  CodeFolder();  // with a definition that is right: [=x=] and [=kind=] in, height out
  ~CodeFolder();
  const std::string& path() const { return path_; }
  std::string work() const;  // an empty folder for a run; a new one each time
  void write(const std::string& name, const std::string& text, bool executable = false) const;
  std::string read(const std::string& name) const;
  // Replaces a part of code.toml; the test fails if it is not there.
  void replace(const std::string& old_text, const std::string& new_text) const;

 private:
  std::string path_;
  mutable int works_ = 0;
};

}  // namespace drover::code
