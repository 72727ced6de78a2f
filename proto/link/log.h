// A program's log: one line an event on stderr, `2026-11-30T12:00:00.123Z info message key=value`.
#pragma once

#include <string_view>

namespace drover::link {

enum class LogLevel { kDebug, kInfo, kWarning, kError };

// Sets spdlog's default logger up: stderr, one line an event, control characters shown as escapes. Once, from main.
// DROVER_LOG=debug|info|warning|error overrides `level`.
void start_log(std::string_view program, LogLevel level = LogLevel::kInfo);

}  // namespace drover::link
