#include "commands/output.h"

#include <cerrno>
#include <cstring>
#include <nlohmann/json.hpp>

#include "absl/strings/str_cat.h"
#include "commands/json.h"
#include "link/status.h"
#include "link/text.h"

namespace drover::commands {

Output::Output(std::FILE* data, std::FILE* messages, bool json)
    : data_(data),
      messages_(messages),
      json_(json),
      data_screen_(screen::Screen::of(screen::Surroundings::of(fileno(data)), json)),
      message_screen_(screen::Screen::of(screen::Surroundings::of(fileno(messages)), false)) {}

void Output::check_write() {
  if (errno == EPIPE) {
    closed_ = true;
  } else if (error_ == 0) {
    error_ = errno == 0 ? EIO : errno;
  }
}

void Output::data(std::string_view text) {
  if (closed_ || error_ != 0) return;
  errno = 0;
  if (std::fwrite(text.data(), 1, text.size(), data_) != text.size()) check_write();
}

void Output::document(const nlohmann::json& document) {
  data(text_of(document) + "\n");
  errno = 0;
  if (!closed_ && std::fflush(data_) != 0) check_write();
}

void Output::say(std::string_view message) {
  std::fprintf(messages_, "%.*s\n", static_cast<int>(message.size()), message.data());
  std::fflush(messages_);
}

Exit Output::fail(const absl::Status& status) {
  std::string text(status.message());
  const std::string nearest = nearest_in(status);
  if (!nearest.empty() && text.find(nearest) == std::string::npos) {
    absl::StrAppend(&text, "; did you mean \"", nearest, "\"?");
  }
  say(absl::StrCat(message_screen_.bad("drover:"), " ", link::printable(text, /*keep_lines=*/true)));
  if (json_) document({{"error", error_json(status, nearest)}});
  return exit_for(status);
}

Exit Output::complain(const std::vector<studyfile::Complaint>& complaints) {
  nlohmann::json problems = nlohmann::json::array();
  for (const studyfile::Complaint& complaint : complaints) {
    say(complaint.line());
    problems.push_back(to_json(complaint));
  }
  if (json_) document({{"ok", false}, {"problems", std::move(problems)}});
  return Exit::kWrongInput;
}

Exit Output::finish(Exit exit) {
  errno = 0;
  if (!closed_ && error_ == 0 && std::fflush(data_) != 0) check_write();
  if (error_ == 0) return exit;
  say(absl::StrCat("drover: the output cannot be written: ", std::strerror(error_)));
  return Exit::kNo;
}

std::string nearest_in(const absl::Status& status) {
  const auto detail = link::error_detail(status);
  if (!detail.has_value()) return "";
  const auto found = detail->metadata().find("nearest");
  if (found != detail->metadata().end()) return found->second;
  return detail->problems_size() == 1 ? detail->problems(0).nearest() : "";
}

}  // namespace drover::commands
