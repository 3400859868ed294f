#pragma once
/// Files read and written as a whole: at any moment a file is its old self or its new one.

#include <atomic>
#include <cerrno>
#include <cstdio>
#include <filesystem>
#include <memory>
#include <string>
#include <system_error>

#if defined(__unix__) || defined(__APPLE__)
#include <fcntl.h>
#include <unistd.h>
#endif

#include <whet/support/error.hpp>

namespace whet::detail {

/// @throws FileError that names the file, with the system's words for `code`, or others
[[noreturn]] inline void refuse_file(const std::filesystem::path& path, const std::string& doing,
                                     const std::string& words, const std::string& advice = {}) {
  fail<FileError>({.where = path.string(), .what = doing, .got = words, .advice = advice});
}
[[noreturn]] inline void refuse_file(const std::filesystem::path& path, const std::string& doing,
                                     int code) {
  refuse_file(path, doing, in_quotes(std::generic_category().message(code)));
}

struct CloseFile {
  void operator()(std::FILE* file) const noexcept { (void)std::fclose(file); }
};
using OpenFile = std::unique_ptr<std::FILE, CloseFile>;

/// All bytes of a file.
/// @throws FileError if it cannot be read
[[nodiscard]] inline std::string read_file(const std::filesystem::path& path) {
  const OpenFile file(std::fopen(path.string().c_str(), "rb"));
  if (!file) refuse_file(path, "reading", errno);
  std::string text, chunk(std::size_t{1} << 18U, '\0');
  while (const std::size_t count = std::fread(chunk.data(), 1, chunk.size(), file.get())) {
    text.append(chunk, 0, count);
  }
  if (std::ferror(file.get()) != 0) refuse_file(path, "reading", errno);
  return text;
}

/// Wait until a file, or the list of files in a folder, is on the disk, where the system can tell.
[[nodiscard]] inline bool reached_disk([[maybe_unused]] std::FILE* file) {
#if defined(__unix__) || defined(__APPLE__)
  return ::fsync(::fileno(file)) == 0;
#else
  return true;
#endif
}
inline void sync_folder([[maybe_unused]] const std::filesystem::path& folder) {
#if defined(__unix__) || defined(__APPLE__)
  const int list = ::open(folder.empty() ? "." : folder.c_str(), O_RDONLY | O_CLOEXEC);
  if (list < 0) return;  // some folders may be written but not read
  (void)::fsync(list);   // nor does every file system know how
  (void)::close(list);
#endif
}

/// A file beside another, of a name that nobody else has; deleted unless it took its place.
class TemporaryFile {
 public:
  explicit TemporaryFile(const std::filesystem::path& target) : target_(target) {
    static std::atomic<unsigned> counter{0};
#if defined(__unix__) || defined(__APPLE__)
    const std::string process = text(::getpid()) + "-";
#else
    const std::string process;
#endif
    do {  // "x": made by this call, or else it fails; another process elsewhere may have our number
      path_ = target.parent_path() / (".whet-" + process + text(counter++) + ".part");
      file_.reset(std::fopen(path_.string().c_str(), "wbx"));
    } while (!file_ && errno == EEXIST);
    if (!file_) refuse_file(target, "writing", errno);
  }
  TemporaryFile(const TemporaryFile&) = delete;
  TemporaryFile& operator=(const TemporaryFile&) = delete;
  ~TemporaryFile() {
    file_.reset();
    std::error_code ignored;
    if (!path_.empty()) std::filesystem::remove(path_, ignored);
  }

  void write(const std::string& text) {
    const bool good = std::fwrite(text.data(), 1, text.size(), file_.get()) == text.size() &&
                      std::fflush(file_.get()) == 0 && reached_disk(file_.get());
    if (!good) refuse_file(target_, "writing", errno);
    if (std::fclose(file_.release()) != 0) refuse_file(target_, "writing", errno);
  }

  void replace_target(std::filesystem::perms permissions) {
    std::error_code error;
    if (permissions != std::filesystem::perms::unknown) {
      std::filesystem::permissions(path_, permissions, error);
    }
    std::filesystem::rename(path_, target_, error);
    if (error) refuse_file(target_, "writing", in_quotes(error.message()));
    path_.clear();
    sync_folder(target_.parent_path());
  }

 private:
  std::filesystem::path target_, path_{};
  OpenFile file_{};
};

/// Write a file so that neither a crash, nor a full disk, nor another writer leaves a damaged one:
/// under another name in the same folder, onto the disk, then renamed over the old one, whose
/// permissions stay. A symbolic link is followed. A process that is killed half-way leaves the old
/// file, and beside it one that begins with ".whet-".
/// @throws FileError if it cannot be written, or something that is no plain file, or a file that is
///   write-protected, stands there
inline void write_file(const std::filesystem::path& path, const std::string& text) {
  namespace fs = std::filesystem;
  std::error_code error;
  const fs::path target = fs::is_symlink(path, error) ? fs::weakly_canonical(path, error) : path;
  const fs::file_status before = fs::status(target, error);
  const bool there = fs::exists(before);
  if (there && !fs::is_regular_file(before)) {
    refuse_file(path, "writing",
                fs::is_directory(before) ? "a folder" : "something that is no file",
                "Give the path of a file.");
  }
  constexpr fs::perms writable =
      fs::perms::owner_write | fs::perms::group_write | fs::perms::others_write;
  if (there && (before.permissions() & writable) == fs::perms::none) {
    refuse_file(path, "writing", "a write-protected file", "Give another path.");
  }
  TemporaryFile temporary(target);
  temporary.write(text);
  temporary.replace_target(there ? before.permissions() : fs::perms::unknown);
}

}  // namespace whet::detail
