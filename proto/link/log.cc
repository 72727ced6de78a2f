#include "link/log.h"

#include <cstdlib>
#include <map>
#include <memory>
#include <string>

#include <spdlog/pattern_formatter.h>
#include <spdlog/sinks/stdout_sinks.h>
#include <spdlog/spdlog.h>

#include "link/text.h"

namespace drover::link {
namespace {

// The message with control characters as escapes, so that nothing that a simulation wrote can forge a line.
class Printable final : public spdlog::custom_flag_formatter {
 public:
  void format(const spdlog::details::log_msg& message, const std::tm&, spdlog::memory_buf_t& out) override {
    const std::string text = printable({message.payload.data(), message.payload.size()});
    out.append(text.data(), text.data() + text.size());
  }
  std::unique_ptr<custom_flag_formatter> clone() const override { return std::make_unique<Printable>(); }
};

spdlog::level::level_enum level_of(LogLevel level) {
  switch (level) {
    case LogLevel::kDebug: return spdlog::level::debug;
    case LogLevel::kInfo: return spdlog::level::info;
    case LogLevel::kWarning: return spdlog::level::warn;
    case LogLevel::kError: return spdlog::level::err;
  }
  return spdlog::level::info;
}

LogLevel asked_level(LogLevel usual) {
  const char* const text = std::getenv("DROVER_LOG");
  if (text == nullptr) return usual;
  static const std::map<std::string, LogLevel> kWords = {{"debug", LogLevel::kDebug},
                                                         {"info", LogLevel::kInfo},
                                                         {"warning", LogLevel::kWarning},
                                                         {"error", LogLevel::kError}};
  const auto at = kWords.find(text);
  return at == kWords.end() ? usual : at->second;
}

}  // namespace

void start_log(std::string_view program, LogLevel level) {
  auto sink = std::make_shared<spdlog::sinks::stderr_sink_mt>();
  auto logger = std::make_shared<spdlog::logger>(std::string(program), std::move(sink));
  auto formatter = std::make_unique<spdlog::pattern_formatter>(spdlog::pattern_time_type::utc);
  formatter->add_flag<Printable>('*').set_pattern("%Y-%m-%dT%H:%M:%S.%eZ %l %*");
  logger->set_formatter(std::move(formatter));
  logger->set_level(level_of(asked_level(level)));
  logger->flush_on(spdlog::level::info);
  spdlog::set_default_logger(std::move(logger));
}

}  // namespace drover::link
