#include "link/address.h"

#include <sys/stat.h>
#include <sys/un.h>
#include <unistd.h>

#include <cerrno>
#include <cstdlib>
#include <cstring>

#include "absl/strings/numbers.h"
#include "absl/strings/str_cat.h"

namespace drover::link {
namespace {

constexpr std::string_view kUnix = "unix:";
constexpr std::size_t kLongestSocketName = sizeof(sockaddr_un::sun_path) - 1;

absl::Status malformed(std::string_view text, const std::string& why) {
  return absl::InvalidArgumentError(
      absl::StrCat("address \"", std::string(text), "\": ", why, "; write unix:/path or host:port"));
}

absl::StatusOr<Address> parse_unix(std::string_view text) {
  Address address;
  address.is_unix = true;
  address.path = std::string(text.substr(kUnix.size()));
  if (address.path.empty() || address.path.front() != '/') return malformed(text, "the socket's path must begin with /");
  if (address.path.size() > kLongestSocketName) {
    return malformed(text, absl::StrCat("the path has ", address.path.size(), " bytes, a socket's may have ",
                                        kLongestSocketName));
  }
  return address;
}

bool all_digits(std::string_view text) {
  return !text.empty() && text.find_first_not_of("0123456789") == std::string_view::npos;
}

}  // namespace

absl::StatusOr<Address> Address::parse(std::string_view text) {
  if (text.substr(0, kUnix.size()) == kUnix) return parse_unix(text);
  const std::size_t colon = text.rfind(':');
  if (colon == std::string_view::npos) return malformed(text, "it has no port");
  std::string_view host = text.substr(0, colon);
  const std::string_view port = text.substr(colon + 1);
  const bool bracketed = host.size() > 2 && host.front() == '[' && host.back() == ']';
  if (bracketed) host = host.substr(1, host.size() - 2);
  if (host.empty()) return malformed(text, "it has no host");
  if (!bracketed && host.find(':') != std::string_view::npos) return malformed(text, "an IPv6 address needs brackets");
  if (host.find_first_of(" \t/") != std::string_view::npos) return malformed(text, "that is no host name");
  Address address;
  address.host = std::string(host);
  if (!all_digits(port) || port.size() > 5 || !absl::SimpleAtoi(std::string(port), &address.port) ||
      address.port > 65535) {
    return malformed(text, "the port must be a number from 0 to 65535");
  }
  return address;
}

std::string Address::text() const {
  if (is_unix) return absl::StrCat(std::string(kUnix), path);
  if (host.find(':') != std::string::npos) return absl::StrCat("[", host, "]:", port);
  return absl::StrCat(host, ":", port);
}

bool Address::is_local() const {
  if (is_unix || host == "localhost" || host == "::1") return true;
  // 127.0.0.0/8, written as four numbers; anything else that begins so is a name of somebody's.
  return host.rfind("127.", 0) == 0 && host.find_first_not_of("0123456789.") == std::string::npos;
}

std::string default_address() {
  const char* const runtime = std::getenv("XDG_RUNTIME_DIR");
  const std::string folder = runtime != nullptr && *runtime == '/' ? absl::StrCat(runtime, "/drover")
                                                                   : absl::StrCat("/tmp/drover-", getuid());
  return absl::StrCat("unix:", folder, "/coordinator.sock");
}

absl::Status prepare_socket_folder(const Address& address) {
  if (!address.is_unix) return absl::OkStatus();
  const std::size_t slash = address.path.rfind('/');
  const std::string folder = slash == 0 ? "/" : address.path.substr(0, slash);
  const auto refuse = [&](const std::string& why) {
    return absl::FailedPreconditionError(absl::StrCat("folder ", folder, " of the socket ", why));
  };
  if (mkdir(folder.c_str(), 0700) != 0 && errno != EEXIST) {
    return refuse(absl::StrCat("cannot be made: ", std::strerror(errno)));
  }
  struct stat info {};
  if (lstat(folder.c_str(), &info) != 0) return refuse(absl::StrCat("cannot be looked at: ", std::strerror(errno)));
  if (S_ISLNK(info.st_mode)) return refuse("is a symbolic link; name the folder itself");
  if (!S_ISDIR(info.st_mode)) return refuse("is no folder");
  if (info.st_uid != geteuid()) return refuse("belongs to another user; name a folder of your own");
  if ((info.st_mode & 077) != 0) {
    return refuse(absl::StrCat("is open to others, who could use the socket; close it with: chmod 700 ", folder));
  }
  return absl::OkStatus();
}

}  // namespace drover::link
