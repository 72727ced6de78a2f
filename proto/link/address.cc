#include "link/address.h"

#include <arpa/inet.h>
#include <fcntl.h>
#include <netinet/in.h>
#include <sys/stat.h>
#include <sys/un.h>
#include <unistd.h>

#include <algorithm>
#include <cerrno>
#include <cstdlib>
#include <cstring>

#include "absl/strings/ascii.h"
#include "absl/strings/match.h"
#include "absl/strings/numbers.h"
#include "absl/strings/str_cat.h"
#include "link/text.h"
#include "status/try.h"

namespace drover::link {
namespace {

constexpr std::string_view kUnix = "unix:";
constexpr std::size_t kLongestPath = sizeof(sockaddr_un::sun_path) - 1;
constexpr std::size_t kLongestHost = 253;  // of a name in the DNS (RFC 1035)

absl::Status wrong(std::string_view text, std::string_view why) {
  return absl::InvalidArgumentError(
      absl::StrCat("address \"", printable(text), "\": ", std::string(why), "; write unix:/path or host:port"));
}

absl::StatusOr<Address> parse_unix(std::string_view text) {
  const std::string_view path = text.substr(kUnix.size());
  if (path.empty() || path.front() != '/') return wrong(text, "the socket's path must begin with /");
  if (path.back() == '/') return wrong(text, "the socket's path ends in a folder");
  if (path.find('\0') != std::string_view::npos) return wrong(text, "a zero byte in the path");
  if (path.size() > kLongestPath) {
    return wrong(text,
                 absl::StrCat("the path has ", path.size(), " bytes, and a socket's name at most ", kLongestPath));
  }
  return Address{.is_unix = true, .path = std::string(path)};
}

bool in_host_name(char c) {
  return absl::ascii_isalnum(static_cast<unsigned char>(c)) || c == '-' || c == '.' || c == '_';
}

absl::Status check_host(std::string_view text, const std::string& host, bool bracketed) {
  in6_addr parsed{};
  if (bracketed) {
    if (inet_pton(AF_INET6, host.c_str(), &parsed) != 1) return wrong(text, "no IPv6 address between the brackets");
    return absl::OkStatus();
  }
  if (host.empty()) return wrong(text, "no host before the colon");
  if (host.find(':') != std::string::npos) return wrong(text, "an IPv6 address needs brackets, as in [::1]:7777");
  if (host.size() > kLongestHost || !std::all_of(host.begin(), host.end(), in_host_name)) {
    return wrong(text, "no valid host name");
  }
  return absl::OkStatus();
}

absl::StatusOr<Address> parse_tcp(std::string_view text) {
  const std::size_t colon = text.rfind(':');
  if (colon == std::string_view::npos) return wrong(text, "no port");
  std::string_view host = text.substr(0, colon);
  const std::string_view port_text = text.substr(colon + 1);
  const bool bracketed = host.size() >= 2 && host.front() == '[' && host.back() == ']';
  if (bracketed) host = host.substr(1, host.size() - 2);
  Address made{.host = std::string(host)};
  DROVER_TRY(check_host(text, made.host, bracketed));
  const bool digits = !port_text.empty() && port_text.size() <= 5 &&
                      std::all_of(port_text.begin(), port_text.end(), [](char c) { return c >= '0' && c <= '9'; });
  if (!digits || !absl::SimpleAtoi({port_text.data(), port_text.size()}, &made.port) || made.port > 65535) {
    return wrong(text, "the port is no number from 0 to 65535");
  }
  return made;
}

absl::Status bad_folder(const std::string& folder, std::string_view why) {
  return absl::FailedPreconditionError(
      absl::StrCat("folder ", printable(folder), " of the socket: ", std::string(why)));
}

}  // namespace

absl::StatusOr<Address> Address::parse(std::string_view text) {
  const bool unix_form = text.substr(0, kUnix.size()) == kUnix;
  return unix_form ? parse_unix(text) : parse_tcp(text);
}

std::string Address::text() const {
  if (is_unix) return absl::StrCat(std::string(kUnix), path);
  if (host.find(':') != std::string::npos) return absl::StrCat("[", host, "]:", port);
  return absl::StrCat(host, ":", port);
}

bool Address::is_local() const {
  if (is_unix) return true;
  if (absl::EqualsIgnoreCase(host, "localhost")) return true;
  in_addr four{};
  if (inet_pton(AF_INET, host.c_str(), &four) == 1) return ntohl(four.s_addr) >> 24 == 127;
  in6_addr six{};
  return inet_pton(AF_INET6, host.c_str(), &six) == 1 && IN6_IS_ADDR_LOOPBACK(&six);
}

std::string default_address() {
  const char* const runtime = std::getenv("XDG_RUNTIME_DIR");
  const bool usable = runtime != nullptr && runtime[0] == '/';
  const std::string folder = usable ? absl::StrCat(runtime, "/drover") : absl::StrCat("/tmp/drover-", getuid());
  return absl::StrCat(std::string(kUnix), folder, "/coordinator.sock");
}

absl::Status prepare_socket_folder(const Address& address) {
  if (!address.is_unix) return absl::OkStatus();
  const std::size_t slash = address.path.find_last_not_of('/', address.path.rfind('/'));
  const std::string folder = slash == std::string::npos ? "/" : address.path.substr(0, slash + 1);
  if (mkdir(folder.c_str(), 0700) != 0 && errno != EEXIST) {
    return bad_folder(folder, absl::StrCat("cannot be made: ", std::strerror(errno)));
  }
  struct stat info {};
  if (lstat(folder.c_str(), &info) != 0) return bad_folder(folder, std::strerror(errno));
  if (S_ISLNK(info.st_mode)) return bad_folder(folder, "is a symbolic link; name the folder itself");
  if (!S_ISDIR(info.st_mode)) return bad_folder(folder, "is no folder");
  if (info.st_uid != geteuid())
    return bad_folder(folder, absl::StrCat("belongs to user ", info.st_uid, ", not to you"));
  if ((info.st_mode & 077) != 0) {
    return bad_folder(folder,
                      "is open to other users, who could then talk to the coordinator; close it with chmod 700, "
                      "or name a socket in a folder of its own");
  }
  return absl::OkStatus();
}

}  // namespace drover::link
