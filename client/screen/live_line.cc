#include "screen/live_line.h"

#include "screen/table.h"

namespace drover::screen {
namespace {

// The first `most` characters.
std::string_view cut(std::string_view text, int most) {
  std::size_t end = 0;
  for (int count = 0; end < text.size(); ++end) {
    const bool begins = (static_cast<unsigned char>(text[end]) & 0xC0) != 0x80;
    if (begins && count++ == most) break;
  }
  return text.substr(0, end);
}

}  // namespace

void LiveLine::show(const std::string& text, absl::Duration now) {
  if (text == shown_) return;
  if (screen_.live) {
    // The last column stays free: a full line would wrap.
    const std::string line(cut(text, columns_ - 1));
    std::fprintf(stream_, "\r%s\x1b[K", line.c_str());
  } else {
    if (printed_.has_value() && now - *printed_ < every_) return;
    printed_ = now;
    std::fprintf(stream_, "%s\n", text.c_str());
  }
  std::fflush(stream_);
  shown_ = text;
}

void LiveLine::print(std::string_view line) {
  const std::string live = screen_.live ? shown_ : "";
  clear();
  std::fprintf(stream_, "%.*s\n", static_cast<int>(line.size()), line.data());
  if (!live.empty()) show(live, absl::ZeroDuration());
  std::fflush(stream_);
}

void LiveLine::clear() {
  if (!screen_.live || shown_.empty()) return;
  std::fprintf(stream_, "\r\x1b[K");
  std::fflush(stream_);
  shown_.clear();
}

}  // namespace drover::screen
