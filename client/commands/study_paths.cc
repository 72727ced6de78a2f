#include "commands/study_paths.h"

#include <algorithm>
#include <filesystem>
#include <thread>

namespace drover::commands {

std::string data_folder_of(const std::string& study_file) {
  std::filesystem::path path(study_file);
  if (path.extension() == ".toml") path.replace_extension();
  return path.string() + ".drover";
}

std::string codes_folder_of(const std::string& study_file) {
  return (std::filesystem::path(study_file).parent_path() / "codes").string();
}

int usual_slots() { return std::max(1, static_cast<int>(std::thread::hardware_concurrency())); }

}  // namespace drover::commands
