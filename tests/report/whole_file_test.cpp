#include <whet/report/whole_file.hpp>

#include <atomic>
#include <string>
#include <thread>
#include <vector>

#include <doctest/doctest.h>

#include <support/temporary_folder.hpp>

#if defined(__unix__)
#include <sys/resource.h>
#include <sys/stat.h>

#include <csignal>
#endif

namespace fs = std::filesystem;
using whet::FileError;
using whet::detail::read_file;
using whet::detail::write_file;
using whet::test::put;
using whet::test::TemporaryFolder;
using whet::test::text_of;

TEST_CASE("What is written is read again, whatever bytes it is made of, and leaves nothing else") {
  const TemporaryFolder folder;
  std::string text;
  for (int i = 0; i < 700000; ++i) text += static_cast<char>(i % 641 * (i % 641) % 257);
  for (const std::string& each : {text, std::string(), std::string("\r\n\x1a", 3)}) {
    write_file(folder / "kept", each);
    CHECK(read_file(folder / "kept") == each);
    CHECK(text_of(folder / "kept") == each);
  }
  CHECK(folder.size() == 1);
}

TEST_CASE("A file name may be as long as the system allows, and a path may be relative") {
  const TemporaryFolder folder;
  write_file(folder / std::string(255, 'x'), "long");
  CHECK(text_of(folder / std::string(255, 'x')) == "long");
  const fs::path before = fs::current_path();
  fs::current_path(folder.path());
  write_file("here", "near");
  fs::current_path(before);
  CHECK(text_of(folder / "here") == "near");
  CHECK(folder.size() == 2);
}

TEST_CASE("A write that cannot be done is refused by path and reason, and leaves nothing behind") {
  const TemporaryFolder folder;
  put(folder / "file.txt", "old");
  CHECK_THROWS_WITH_AS(write_file(folder / "file.txt/x.json", "new"),
                       doctest::Contains("file.txt/x.json: writing: got \"Not a directory\""),
                       FileError);
  CHECK_THROWS_WITH_AS(write_file(folder / "none/x.json", "new"),
                       doctest::Contains("none/x.json: writing: got \"No such file or directory\""),
                       FileError);
  CHECK_THROWS_WITH_AS(write_file(folder.path(), "new"),
                       doctest::Contains("writing: got a folder. Give the path of a file."),
                       FileError);
  CHECK_THROWS_AS(write_file(folder / "", "new"), FileError);
  CHECK_THROWS_AS(write_file("", "new"), FileError);
  CHECK(text_of(folder / "file.txt") == "old");
  CHECK(folder.size() == 1);
}

TEST_CASE("A write-protected file stays as it is") {
  const TemporaryFolder folder;
  put(folder / "kept", "old");
  fs::permissions(folder / "kept", fs::perms::owner_read);
  CHECK_THROWS_WITH_AS(write_file(folder / "kept", "new"),
                       doctest::Contains("kept: writing: got a write-protected file"), FileError);
  CHECK(text_of(folder / "kept") == "old");
  CHECK(folder.size() == 1);
}

TEST_CASE("A file that is missing, or is a folder, is refused with the reason") {
  const TemporaryFolder folder;
  CHECK_THROWS_WITH_AS((void)read_file(folder / "none"),
                       doctest::Contains("none: reading: got \"No such file or directory\""),
                       FileError);
  CHECK_THROWS_WITH_AS((void)read_file(folder.path()),
                       doctest::Contains("reading: got \"Is a directory\""), FileError);
}

TEST_CASE("Writers of one path do not mix, and a reader meets one of them whole") {
  const TemporaryFolder folder;
  const fs::path path = folder / "shared";
  const std::size_t size = 200000;
  write_file(path, std::string(size, 'a'));
  std::atomic<bool> done{false};
  std::atomic<int> torn{0}, read{0};
  std::thread reader([&] {
    while (!done) {
      const std::string text = read_file(path);
      if (text.size() != size || text.find_first_not_of(text.front()) != std::string::npos) ++torn;
      ++read;
    }
  });
  std::vector<std::thread> writers;
  for (const char letter : {'a', 'b', 'c', 'd'}) {
    writers.emplace_back([&, letter] {
      for (int i = 0; i < 25; ++i) write_file(path, std::string(size, letter));
    });
  }
  for (std::thread& writer : writers) writer.join();
  done = true;
  reader.join();
  CHECK(read > 0);
  CHECK(torn == 0);
  CHECK(folder.size() == 1);
}

#if defined(__unix__)

TEST_CASE("A disk that fills up half-way leaves the old file and nothing else") {
  const TemporaryFolder folder;
  put(folder / "kept", "old");
  rlimit before{};
  REQUIRE(getrlimit(RLIMIT_FSIZE, &before) == 0);
  const auto handler = std::signal(SIGXFSZ, SIG_IGN);
  const rlimit small{1000, before.rlim_max};
  REQUIRE(setrlimit(RLIMIT_FSIZE, &small) == 0);
  std::string words;
  try {
    write_file(folder / "kept", std::string(100000, 'x'));
  } catch (const FileError& error) {
    words = error.what();
  }
  setrlimit(RLIMIT_FSIZE, &before);
  std::signal(SIGXFSZ, handler);
  CHECK(words.find("kept: writing: got \"File too large\"") != std::string::npos);
  CHECK(text_of(folder / "kept") == "old");
  CHECK(folder.size() == 1);
}

TEST_CASE("A link to a file is followed, and the permissions of the file stay") {
  const TemporaryFolder folder;
  put(folder / "kept", "old");
  const auto mode = fs::perms::owner_read | fs::perms::owner_write | fs::perms::group_write;
  fs::permissions(folder / "kept", mode);
  fs::create_symlink("kept", folder / "link");
  write_file(folder / "link", "new");
  CHECK(fs::is_symlink(folder / "link"));
  CHECK(text_of(folder / "kept") == "new");
  CHECK(fs::status(folder / "kept").permissions() == mode);
}

TEST_CASE("What is no file, such as a pipe, is not replaced") {
  const TemporaryFolder folder;
  const fs::path pipe = folder / "pipe";
  REQUIRE(mkfifo(pipe.c_str(), 0600) == 0);
  CHECK_THROWS_WITH_AS(write_file(pipe, "new"), doctest::Contains("something that is no file"),
                       FileError);
  CHECK(fs::is_fifo(pipe));
}

#endif
