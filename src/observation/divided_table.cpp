#include <fmt/format.h>

#include <algorithm>
#include <filesystem>
#include <fstream>
#include <mutex>
#include <unordered_map>

#include <trotline/base/files.hpp>
#include <trotline/base/text.hpp>
#include <trotline/observation/divided_table.hpp>

#include "fits_rows.hpp"
#include "raw_table.hpp"

namespace trotline {
namespace {

/// A run of rows of one part: bytes of a text, or rows of a FITS table (begin and size count rows then).
struct Run {
  std::uint64_t begin = 0;
  std::uint32_t size = 0;
  std::uint32_t line = 0;
};

std::ifstream opened(const std::string& path) {
  const bool is_folder = std::filesystem::is_directory(path);
  std::ifstream file(path, std::ios::binary);
  if (!file || is_folder) {
    throw InputError(Place{path}, {is_folder ? "is a folder" : "cannot be read", "an intensity table"});
  }
  return file;
}

std::optional<std::size_t> column_named(const raw::Table& table, const std::string& name) {
  for (std::size_t i = 0; i < table.columns.size(); ++i) {
    if (lower_case(trimmed(table.columns[i].name)) == name) return i;
  }
  return std::nullopt;
}

/// What the cells of a row mean depends on this.
std::string fingerprint_of_columns(const raw::Table& header) {
  std::string text;
  for (const raw::Column& column : header.columns) {
    text += fmt::format("{}\n{}\n{}\n", column.name, column.unit.value_or(""), column.datatype);
  }
  return fingerprint(text);
}

/// The cells of a row with marks between them: white space and comments beside them make no difference.
std::string joined(const std::vector<std::string>& cells) {
  std::string text;
  for (const std::string& cell : cells) text.append(cell).append(1, '\x1F');
  return text;
}

/// Sorts runs of rows by source and species.
class Sorter {
 public:
  explicit Sorter(const raw::Table& header)
      : source_(column_named(header, "source")),
        species_(column_named(header, "species")),
        start_(fingerprint_of_columns(header)) {}

  [[nodiscard]] std::optional<std::size_t> source_column() const { return source_; }
  [[nodiscard]] std::optional<std::size_t> species_column() const { return species_; }

  /// @param bytes  what the row holds, for the fingerprint
  /// @param line  where the row stands; its run may begin earlier, with comments
  void add(const std::string& source, const std::string& species, const Run& run, std::size_t line,
           std::string_view bytes) {
    const auto [place, is_new] =
        index_.emplace(fmt::format("{}:{}{}", source.size(), source, species), parts.size());
    if (is_new) {
      parts.push_back({source.empty() ? std::nullopt : std::optional(source),
                       species.empty() ? std::nullopt : std::optional(species), line, line, {}, 0, start_});
      runs.emplace_back();
    }
    TablePart& part = parts[place->second];
    std::vector<Run>& of_part = runs[place->second];
    if (part.rows > 0 && line != part.last_line + 1) {
      part.gaps = fingerprint(part.gaps + fmt::format("{}", line));
    }
    part.last_line = line;
    ++part.rows;
    part.fingerprint = fingerprint(part.fingerprint + std::string(bytes));
    const bool goes_on = !of_part.empty() && of_part.back().begin + of_part.back().size == run.begin;
    constexpr std::uint64_t kLongestRun = std::uint64_t{1} << 31;
    if (goes_on && of_part.back().size < kLongestRun) {
      of_part.back().size += run.size;
    } else {
      of_part.push_back(run);
    }
  }

  std::vector<TablePart> parts;
  std::vector<std::vector<Run>> runs;

 private:
  std::optional<std::size_t> source_;
  std::optional<std::size_t> species_;
  std::string start_;
  std::unordered_map<std::string, std::size_t> index_;
};

[[noreturn]] void refuse_changed(const std::string& path) {
  throw InputError(Place{path}, {"the table has changed since the survey began",
                                 "a table that stays as it is", "run the survey again"});
}

}  // namespace

/// What text and FITS do differently.
class DividedTable::Form {
 public:
  explicit Form(std::string path) : path_(std::move(path)) {}
  Form(const Form&) = delete;
  Form& operator=(const Form&) = delete;
  virtual ~Form() = default;

  [[nodiscard]] virtual IntensityTable read(std::size_t part) const = 0;
  [[nodiscard]] const std::string& path() const { return path_; }
  [[nodiscard]] const std::vector<TablePart>& parts() const { return parts_; }

 protected:
  void take(Sorter&& sorter) {
    if (sorter.parts.empty()) {
      throw InputError(Place{path_, header_.header_line},
                       {"the table has no row", "one row for each line at least"});
    }
    parts_ = std::move(sorter.parts);
    runs_ = std::move(sorter.runs);
  }

  std::string path_;
  raw::Table header_;  ///< the columns, without rows
  std::vector<TablePart> parts_;
  std::vector<std::vector<Run>> runs_;
};

namespace {

/// A table of text, gone through in blocks that are filled up to whole records.
class TextForm : public DividedTable::Form {
 public:
  static constexpr std::size_t kBlock = std::size_t{4} << 20;
  static constexpr std::size_t kLargestRecord = std::size_t{64} << 20;

  explicit TextForm(const std::string& path) : Form(path), file_(std::make_unique<std::ifstream>(opened(path))) {
    fill(kBlock);
    if (block_.starts_with("\xEF\xBB\xBF")) skip(3);
    read_header();
    Sorter sorter(header_);
    while (read_record(sorter)) {
    }
    take(std::move(sorter));
    file_.reset();  // thousands of tables may be held
    std::string().swap(block_);
  }

  [[nodiscard]] IntensityTable read(std::size_t part) const override {
    std::ifstream file = opened(path_);
    raw::Table table = header_;
    std::string bytes;
    for (const Run& run : runs_[part]) {
      bytes.resize(run.size);
      file.seekg(static_cast<std::streamoff>(run.begin));
      file.read(bytes.data(), static_cast<std::streamsize>(run.size));
      if (file.gcount() != static_cast<std::streamsize>(run.size)) refuse_changed(path_);
      append(table, raw::checked_text(bytes, path_), run.line);
    }
    check_unchanged(table, part);
    raw::require_types(table);
    return raw::interpret(table);
  }

 private:
  /// Reads more of the file, up to `size` bytes in the block.
  void fill(std::size_t size) {
    const std::size_t held = block_.size();
    if (held >= size || !*file_) return;
    block_.resize(size);
    file_->read(block_.data() + held, static_cast<std::streamsize>(size - held));
    block_.resize(held + static_cast<std::size_t>(file_->gcount()));
  }

  /// Leaves out the first bytes of the block.
  void skip(std::size_t bytes) {
    at_ += bytes;
    offset_ += bytes;
  }

  [[nodiscard]] std::string_view rest() const { return std::string_view(block_).substr(at_); }

  void read_header() {
    const TableFormat format = raw::recognised(rest());
    const std::size_t bytes = header_bytes(format);
    header_ = raw::parse_text(format, raw::checked_text(rest().substr(0, bytes), path_), path_);
    raw::check_header(header_);
    line_ = 1 + lines_in(rest().substr(0, bytes));
    skip(bytes);
  }

  /// Comments and the line of names; in ECSV the commented header belongs to it.
  [[nodiscard]] std::size_t header_bytes(TableFormat format) const {
    raw::RecordReader reader(rest(), path_, 1, raw::Separator::comma);
    if (format == TableFormat::text) {
      if (!reader.next_line()) return rest().size();
    } else {
      if (!reader.next()) return rest().size();
    }
    return reader.position();
  }

  static std::size_t lines_in(std::string_view text) {
    raw::RecordReader reader(text, {}, 1, raw::Separator::comma);
    while (reader.next_line()) {
    }
    return reader.line() - 1;
  }

  /// Sorts the next record; false at the end of the file. A record that touches the end of the block may go
  /// on beyond it, and is read again with more.
  bool read_record(Sorter& sorter) {
    for (std::size_t size = kBlock;; size *= 2) {
      const bool more_to_come = static_cast<bool>(*file_);
      raw::RecordReader reader(rest(), path_, line_, header_.separator);
      try {
        auto record = reader.next();
        if (reader.position() < rest().size() || !more_to_come) {
          if (record) sort(*record, reader.position(), sorter);
          skip(reader.position());
          line_ = reader.line();
          return record.has_value();
        }
      } catch (const InputError&) {
        if (!more_to_come || size > kLargestRecord) throw;
      }
      block_.erase(0, at_);
      at_ = 0;
      fill(size);
    }
  }

  void sort(const raw::Record& record, std::size_t bytes, Sorter& sorter) const {
    const std::string_view text = rest().substr(0, bytes);
    if (!is_utf8(text) || text.find('\0') != std::string_view::npos) {
      throw InputError(Place{path_, record.line},
                       {"bytes that are not UTF-8 stand in this line", "text in UTF-8"});
    }
    std::vector<std::string> cells;
    for (const raw::Field& field : record.fields) cells.push_back(field.text);
    const auto cell = [&](const std::optional<std::size_t>& column) {
      return column && *column < cells.size() ? cells[*column] : std::string{};
    };
    const Run run{offset_, static_cast<std::uint32_t>(bytes), static_cast<std::uint32_t>(line_)};
    sorter.add(cell(sorter.source_column()), cell(sorter.species_column()), run, record.line, joined(cells));
  }

  void append(raw::Table& table, std::string_view bytes, std::size_t line) const {
    raw::RecordReader reader(bytes, path_, line, header_.separator);
    for (raw::Row& row : raw::read_rows(reader, path_, header_.columns.size()))
      table.rows.push_back(std::move(row));
  }

  void check_unchanged(const raw::Table& table, std::size_t part) const {
    std::string print = fingerprint_of_columns(header_);
    for (const raw::Row& row : table.rows) print = fingerprint(print + joined(row.cells));
    if (print != parts_[part].fingerprint) refuse_changed(path_);
  }

  std::unique_ptr<std::ifstream> file_;  ///< only while it is gone through
  std::string block_;
  std::size_t at_ = 0;        ///< where the rest of the block begins
  std::uint64_t offset_ = 0;  ///< the same in the file
  std::size_t line_ = 1;
};

/// The FITS table that was opened last. CFITSIO keeps its errors in one place for all, so one mutex for all.
class OpenFits {
 public:
  static std::mutex& mutex() {
    static std::mutex one;
    return one;
  }

  /// The caller holds the mutex.
  static const raw::FitsRows& rows(const std::string& path) {
    static std::unique_ptr<OpenFits> last;
    if (!last || last->path_ != path) {
      last.reset();
      last = std::make_unique<OpenFits>(path);
    }
    return last->rows_;
  }

  explicit OpenFits(const std::string& path) : path_(path), bytes_(read_file(path)), rows_(bytes_, path) {}

 private:
  std::string path_;
  std::string bytes_;
  raw::FitsRows rows_;
};

class FitsForm : public DividedTable::Form {
 public:
  explicit FitsForm(const std::string& path) : Form(path) {
    const std::lock_guard lock(OpenFits::mutex());
    const raw::FitsRows& fits = OpenFits::rows(path_);
    header_ = fits.header();
    raw::check_header(header_);
    Sorter sorter(header_);
    for (std::size_t first = 0; first < fits.count(); first += kBlock) {
      for (const raw::Row& row : fits.read(first, std::min(kBlock, fits.count() - first))) sort(row, sorter);
    }
    take(std::move(sorter));
  }

  [[nodiscard]] IntensityTable read(std::size_t part) const override {
    const std::lock_guard lock(OpenFits::mutex());
    const raw::FitsRows& fits = OpenFits::rows(path_);
    raw::Table table = header_;
    std::string print = fingerprint_of_columns(header_);
    for (const Run& run : runs_[part]) {
      if (run.begin + run.size > fits.count()) refuse_changed(path_);
      for (raw::Row& row : fits.read(run.begin, run.size)) {
        print = fingerprint(print + joined(row.cells));
        table.rows.push_back(std::move(row));
      }
    }
    if (print != parts_[part].fingerprint) refuse_changed(path_);
    return raw::interpret(table);
  }

 private:
  static constexpr std::size_t kBlock = 4096;  // rows

  static void sort(const raw::Row& row, Sorter& sorter) {
    const auto cell = [&](const std::optional<std::size_t>& column) {
      return column ? row.cells[*column] : std::string{};
    };
    sorter.add(cell(sorter.source_column()), cell(sorter.species_column()),
               {row.line - 1, 1, static_cast<std::uint32_t>(row.line)}, row.line, joined(row.cells));
  }
};

}  // namespace

DividedTable::DividedTable(std::string path) {
  std::string start(512, '\0');
  std::ifstream file = opened(path);
  file.read(start.data(), static_cast<std::streamsize>(start.size()));
  start.resize(static_cast<std::size_t>(file.gcount()));
  raw::refuse_other_formats(start, path);
  if (raw::recognised(start) == TableFormat::fits)
    form_ = std::make_unique<FitsForm>(path);
  else
    form_ = std::make_unique<TextForm>(path);
}

DividedTable::~DividedTable() = default;
DividedTable::DividedTable(DividedTable&&) noexcept = default;
DividedTable& DividedTable::operator=(DividedTable&&) noexcept = default;

const std::string& DividedTable::path() const { return form_->path(); }
const std::vector<TablePart>& DividedTable::parts() const { return form_->parts(); }
IntensityTable DividedTable::read(std::size_t part) const { return form_->read(part); }

}  // namespace trotline
