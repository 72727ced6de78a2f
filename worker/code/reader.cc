#include "code/reader.h"

#include <fcntl.h>
#include <sys/stat.h>
#include <unistd.h>

#include <algorithm>
#include <array>
#include <cerrno>
#include <cmath>
#include <cstring>
#include <optional>

#include "absl/strings/str_cat.h"
#include "code/number.h"
#include "status/try.h"

namespace drover::code {
namespace {

constexpr std::size_t kBlock = 64 << 10;
constexpr std::size_t kLongestLine = 1 << 20;  // of a longer one the beginning is looked at
constexpr std::size_t kShown = 60;             // characters of a text in a message
// File systems keep times in steps; a file written right after the begin may bear a slightly older one.
constexpr absl::Duration kClockStep = absl::Seconds(2);

std::string shown(std::string_view text) {
  std::string made(text.substr(0, kShown));
  for (char& c : made) c = static_cast<unsigned char>(c) < 0x20 || static_cast<unsigned char>(c) >= 0x7f ? '?' : c;
  return made;
}

// Lines of a file, one after the other, in bounded memory. No line end in them.
class Lines {
 public:
  static absl::StatusOr<Lines> open(const std::string& path, const std::string& name) {
    const int file = ::open(path.c_str(), O_RDONLY | O_CLOEXEC | O_NOFOLLOW | O_NONBLOCK);
    if (file < 0) {
      if (errno == ENOENT) return absl::NotFoundError(absl::StrCat("the code wrote no file ", name));
      return absl::NotFoundError(absl::StrCat("file ", name, " cannot be opened: ", std::strerror(errno)));
    }
    Lines lines(file);
    struct stat info {};
    if (fstat(file, &info) != 0 || !S_ISREG(info.st_mode)) {
      return absl::NotFoundError(absl::StrCat(name, " is no regular file"));
    }
    lines.written_ = absl::TimeFromTimespec(info.st_mtim);
    return lines;
  }
  Lines(Lines&& other) noexcept
      : file_(std::exchange(other.file_, -1)), written_(other.written_), block_(std::move(other.block_)) {}
  Lines(const Lines&) = delete;
  Lines& operator=(const Lines&) = delete;
  ~Lines() {
    if (file_ >= 0) close(file_);
  }

  absl::Time written() const { return written_; }

  bool next(std::string& line) {
    line.clear();
    bool any = false;
    while (true) {
      if (at_ == end_ && !fill()) return any;
      any = true;
      const char* const first = block_.data() + at_;
      const auto* const stop = static_cast<const char*>(std::memchr(first, '\n', end_ - at_));
      const std::size_t size = stop == nullptr ? end_ - at_ : static_cast<std::size_t>(stop - first);
      if (line.size() < kLongestLine) line.append(first, std::min(size, kLongestLine - line.size()));
      at_ += size + (stop == nullptr ? 0 : 1);
      if (stop == nullptr) continue;
      if (!line.empty() && line.back() == '\r') line.pop_back();
      return true;
    }
  }

 private:
  explicit Lines(int file) : file_(file), block_(kBlock, '\0') {}
  bool fill() {
    at_ = end_ = 0;
    const ssize_t size = read(file_, block_.data(), block_.size());
    end_ = size > 0 ? static_cast<std::size_t>(size) : 0;
    return end_ > 0;
  }

  int file_;
  absl::Time written_;
  std::string block_;
  std::size_t at_ = 0, end_ = 0;
};

bool is_blank(char c) { return c == ' ' || c == '\t' || c == ',' || c == ';'; }

// The first number in `text`, which may have words, '=' or ':' before it. A number begins where a word does.
absl::StatusOr<double> first_number(std::string_view text) {
  absl::Status asterisks;
  for (std::size_t at = 0; at < text.size(); ++at) {
    const bool begins =
        at == 0 || is_blank(text[at - 1]) || std::string_view("=:(<>[").find(text[at - 1]) != std::string_view::npos;
    if (!begins) continue;
    const absl::StatusOr<ReadNumber> read = read_number(text.substr(at));
    if (absl::IsOutOfRange(read.status()) && text.substr(at, 2) == "**") return read.status();
    if (!read.ok()) continue;
    const std::size_t after = at + read->length;
    // "nano" and "info" are words and no numbers.
    const bool word =
        !std::isfinite(read->value) && after < text.size() && std::isalpha(static_cast<unsigned char>(text[after]));
    if (!word) return read->value;
  }
  return absl::InvalidArgumentError("no number stands there");
}

absl::StatusOr<double> after_text(const OutputReader& output, Lines& lines) {
  int matches = 0;
  for (std::string line; lines.next(line);) {
    for (std::size_t at = line.find(output.after); at != std::string::npos; at = line.find(output.after, at + 1)) {
      if (++matches < output.match) continue;
      std::string rest = line.substr(at + output.after.size());
      absl::StatusOr<double> number = first_number(rest);
      // A code may put the number on the next line.
      std::string following;
      if (absl::IsInvalidArgument(number.status()) && rest.find_first_not_of(" \t:=") == std::string::npos &&
          lines.next(following)) {
        rest = following;
        number = first_number(following);
      }
      if (number.ok()) return number;
      return absl::Status(number.status().code(),
                          absl::StrCat("after \"", shown(output.after), "\" in ", output.file, " stands \"",
                                       shown(rest), "\": ", number.status().message()));
    }
  }
  if (matches == 0) return absl::NotFoundError(absl::StrCat("\"", shown(output.after), "\" is not in ", output.file));
  return absl::NotFoundError(absl::StrCat("\"", shown(output.after), "\" is in ", output.file, " ", matches,
                                          " times, number ", output.match, " is wanted"));
}

absl::StatusOr<double> at_place(const OutputReader& output, Lines& lines) {
  std::string line;
  for (std::int64_t n = 0; n < output.line; ++n) {
    if (!lines.next(line))
      return absl::NotFoundError(absl::StrCat(output.file, " has ", n, " lines, line ", output.line, " is wanted"));
  }
  std::size_t at = 0;
  for (int column = 1;; ++column) {
    while (at < line.size() && is_blank(line[at])) ++at;
    if (at == line.size()) {
      return absl::NotFoundError(absl::StrCat("line ", output.line, " of ", output.file, " has ", column - 1,
                                              " fields, field ", output.column, " is wanted"));
    }
    std::size_t end = at;
    while (end < line.size() && !is_blank(line[end])) ++end;
    if (column < output.column) {
      at = end;
      continue;
    }
    const absl::StatusOr<ReadNumber> read = read_number(std::string_view(line).substr(at, end - at));
    if (read.ok() && read->length == end - at) return read->value;
    const std::string field = shown(std::string_view(line).substr(at, end - at));
    return absl::InvalidArgumentError(absl::StrCat("field ", output.column, " in line ", output.line, " of ",
                                                   output.file, " is \"", field, "\" and no number"));
  }
}

}  // namespace

absl::StatusOr<double> read_output(const OutputReader& output, const std::string& folder, absl::Time begun) {
  DROVER_ASSIGN(Lines lines, Lines::open(absl::StrCat(folder, "/", output.file), output.file));
  if (lines.written() + kClockStep < begun) {
    return absl::FailedPreconditionError(
        absl::StrCat("file ", output.file, " is older than the run: the code did not write it"));
  }
  DROVER_ASSIGN(const double value, output.after.empty() ? at_place(output, lines) : after_text(output, lines));
  if (std::isfinite(value)) return value;
  return absl::OutOfRangeError(absl::StrCat("it is ", std::isnan(value) ? "NaN" : "infinite", " in ", output.file));
}

FoundText find_text(const std::string& path, const std::vector<std::string>& texts) {
  FoundText found;
  absl::StatusOr<Lines> lines = Lines::open(path, path);
  if (!lines.ok()) return found;
  for (std::string line; lines->next(line);) {
    ++found.line;
    for (const std::string& text : texts) {
      if (line.find(text) == std::string::npos) continue;
      return {.found = true, .text = text, .line_text = shown(line), .line = found.line};
    }
  }
  return {};
}

}  // namespace drover::code
