// Where a command writes: data to one stream, everything else to the other.
#pragma once

#include <cstdio>
#include <nlohmann/json_fwd.hpp>
#include <string>
#include <string_view>
#include <vector>

#include "absl/status/status.h"
#include "commands/exit_code.h"
#include "screen/screen.h"
#include "studyfile/complaint.h"

namespace drover::commands {

// Not thread-safe. The streams must outlive it.
class Output {
 public:
  Output(std::FILE* data, std::FILE* messages, bool json);

  bool json() const { return json_; }
  const screen::Screen& data_screen() const { return data_screen_; }
  const screen::Screen& message_screen() const { return message_screen_; }
  std::FILE* messages() const { return messages_; }

  // Data as it is. A reader that went away is no error: what follows is dropped.
  void data(std::string_view text);
  // One line of JSON.
  void document(const nlohmann::json& document);
  // A message for a person, on a line of its own.
  void say(std::string_view message);

  // What went wrong, as a message; with --json also as a document {"error": {...}}.
  Exit fail(const absl::Status& status);
  // What is wrong with a study file; with --json also as a document {"ok": false, "problems": [...]}.
  Exit complain(const std::vector<studyfile::Complaint>& complaints);

  // Flushes the data. `exit`, or kNo with a message when data could not be written (but to a reader that went away).
  Exit finish(Exit exit);

  // The reader of the data is gone: nothing more need be fetched.
  bool closed() const { return closed_; }

 private:
  void check_write();

  std::FILE* data_;
  std::FILE* messages_;
  bool json_;
  screen::Screen data_screen_, message_screen_;
  bool closed_ = false;
  int error_ = 0;
};

// The nearest known name that a NOT_FOUND of the coordinator carries; empty: none.
std::string nearest_in(const absl::Status& status);

}  // namespace drover::commands
