#include <mutex>
#include <set>

#include <trotline/base/text.hpp>

#include "spectrum_reader.hpp"

namespace trotline {
namespace {

constexpr double kNaN = std::numeric_limits<double>::quiet_NaN();

/// The header of the current unit; that of the image where it is compressed.
std::string cards_of(const FitsFile& file) {
  char* text = nullptr;
  int count = 0;
  int status = 0;
  fits_convert_hdr2str(file.handle(), 0, nullptr, 0, &text, &count, &status);
  std::string cards = status == 0 && text != nullptr ? std::string(text) : std::string{};
  int ignored = 0;
  if (text != nullptr) fits_free_memory(text, &ignored);
  file.check(status, "a header cannot be read");
  return cards.substr(0, cards.size() / kFitsCard * kFitsCard);
}

std::vector<long long> lengths_of(const HeaderCards& cards) {
  std::vector<long long> lengths;
  const double axes = cards.number("NAXIS").value_or(0.0);
  for (int i = 1; i <= static_cast<int>(axes); ++i) {
    lengths.push_back(static_cast<long long>(cards.number(fmt::format("NAXIS{}", i)).value_or(0.0)));
  }
  return lengths;
}

long long product(const std::vector<long long>& lengths) {
  long long values = lengths.empty() ? 0 : 1;
  for (const long long length : lengths) values *= length;
  return values;
}

/// Compressed images: only codecs whose decoders check the ends of their buffers, and sizes that the file can
/// hold.
void require_safe_compression(const FitsFile& file, int unit, const std::string& where) {
  const HeaderCards cards(file.structure()[static_cast<std::size_t>(unit) - 1].header, where);
  if (cards.text("ZIMAGE").value_or("F") != "T") return;
  static const std::set<std::string> kKnown = {"RICE_1", "RICE_ONE", "GZIP_1", "GZIP_2"};
  const std::string codec = cards.text("ZCMPTYPE").value_or("");
  if (!kKnown.contains(codec)) {
    cards.refuse(fmt::format("keyword ZCMPTYPE is '{}'", printable(codec)), "RICE_1, GZIP_1 or GZIP_2",
                 "unpack the image first");
  }
  const double axes = cards.number("ZNAXIS").value_or(0.0);
  constexpr double kMostAxes = 9.0;
  if (!(axes >= 1.0 && axes <= kMostAxes))
    cards.refuse(fmt::format("keyword ZNAXIS is {}", axes), "1 to 9 axes");
  constexpr double kMostRatio = 1e4;  // of unpacked values to bytes: far above what any codec reaches
  double values = 1.0;
  for (int i = 1; i <= static_cast<int>(axes); ++i) {
    const double length = cards.number(fmt::format("ZNAXIS{}", i)).value_or(0.0);
    const double tile = cards.number(fmt::format("ZTILE{}", i)).value_or(1.0);
    if (!(length >= 1.0) || !(tile >= 1.0 && tile <= length)) {
      cards.refuse(fmt::format("keywords ZNAXIS{} = {} and ZTILE{} = {}", i, length, i, tile),
                   "tiles that fit the image");
    }
    values *= length;
  }
  const auto bytes = static_cast<double>(file.structure()[static_cast<std::size_t>(unit) - 1].data_bytes);
  if (values > kMostRatio * bytes)
    cards.refuse("the image is absurdly larger than its compressed data", "a complete file");
}

Eigen::ArrayXd read_image(const FitsFile& file, long long values) {
  Eigen::ArrayXd data(values);
  int status = 0;
  int any = 0;
  double hole = kNaN;
  fits_read_img(file.handle(), TDOUBLE, 1, values, &hole, data.data(), &any, &status);
  file.check(status, "the values of an image cannot be read");
  return data;
}

bool is_companion(const std::string& name) {
  static const std::set<std::string> kNames = {"err",    "error",   "errors", "var",    "variance",
                                               "weight", "weights", "sigma",  "uncert", "stddev",
                                               "noise",  "mask",    "dq",     "flags"};
  return kNames.contains(lower_case(name));
}

bool is_mask(const std::string& name) {
  const std::string lower = lower_case(name);
  return lower == "mask" || lower == "dq" || lower == "flags";
}

class FitsReader : public SpectrumFile::Reader {
 public:
  FitsReader(std::string bytes, std::string name, SpectrumOptions options)
      : bytes_(std::move(bytes)), options_(std::move(options)), file_(bytes_, std::move(name)) {
    for (int unit = 1; unit <= file_.units(); ++unit) examine(unit);
    if (items_.empty()) {
      const std::string why = warnings.empty() ? "it holds no data" : listed(warnings, 4);
      throw InputError(Place{file_.name()},
                       {"the file holds no spectrum: " + why,
                        "an image with one spectral axis, or a table with a column DATA"});
    }
  }

  [[nodiscard]] std::size_t size() const override { return items_.size(); }

  [[nodiscard]] Spectrum read(std::size_t index) override {
    const std::scoped_lock lock(mutex_);
    const Item& item = items_[index];
    file_.go_to(item.unit);
    if (item.table) return item.table->read(item.row, options_);
    return read_spectrum(item);
  }

 private:
  struct Item {
    int unit = 0;
    std::shared_ptr<SpectrumTable> table;  ///< nothing for an image
    std::size_t row = 0;
    int mask_unit = 0;  ///< extension with the mask of the image; 0 for none
  };

  [[nodiscard]] std::string where(int unit) const {
    return unit == 1 ? file_.name() : fmt::format("{}, extension {}", file_.name(), unit - 1);
  }

  void pass_over(int unit, const std::string& why) {
    warnings.push_back(
        fmt::format("{}: {}", unit == 1 ? "the primary unit" : fmt::format("extension {}", unit - 1), why));
  }

  void examine(int unit) {
    require_safe_compression(file_, unit, where(unit));
    const int type = file_.go_to(unit);
    if (type == BINARY_TBL) return examine_table(unit);
    if (type != IMAGE_HDU) return pass_over(unit, "an ASCII table");
    examine_image(unit);
  }

  void examine_table(int unit) {
    auto table = std::make_shared<SpectrumTable>(file_, unit, where(unit));
    if (!table->has_spectra())
      return pass_over(unit, "a table without a vector column DATA, SPECTRUM or SERIES");
    for (std::size_t row = 0; row < table->rows(); ++row) items_.push_back({unit, table, row, 0});
    if (table->rows() == 0) pass_over(unit, "a table without rows");
  }

  void examine_image(int unit) {
    const std::string text = cards_of(file_);
    const HeaderCards cards(text, where(unit));
    const std::string name = cards.text("EXTNAME").value_or("");
    const auto lengths = lengths_of(cards);
    const long long values = product(lengths);
    if (values == 0) return;
    if (is_companion(name)) {
      const bool fits = is_mask(name) && !items_.empty() && !items_.back().table && values == last_values_;
      if (fits) items_.back().mask_unit = unit;
      return pass_over(unit, fmt::format("'{}' {}", printable(name),
                                         fits ? "masks the spectrum before it" : "is no spectrum"));
    }
    const auto longest = *std::max_element(lengths.begin(), lengths.end());
    if (!has_spectral_axis(cards, lengths.size())) return pass_over(unit, "an image without spectral axis");
    if (longest != values) {
      std::vector<std::string> sizes;
      for (const long long length : lengths) sizes.push_back(std::to_string(length));
      return pass_over(
          unit, fmt::format("a cube of {} values, where one spectrum was expected", fmt::join(sizes, " x ")));
    }
    items_.push_back({unit, nullptr, 0, 0});
    last_values_ = values;
  }

  static bool has_spectral_axis(const HeaderCards& cards, std::size_t axes) {
    for (std::size_t i = 1; i <= axes; ++i) {
      const std::string type = cards.text(fmt::format("CTYPE{}", i)).value_or("");
      if (type.empty() && axes == 1) return true;  // let the axis reader say what is missing
      static const std::set<std::string> kOthers = {"RA",   "DEC",    "GLON",   "GLAT", "ELON",
                                                    "ELAT", "STOKES", "LINEAR", ""};
      if (!kOthers.contains(type.substr(0, std::min(type.find('-'), type.size())))) return true;
    }
    return false;
  }

  [[nodiscard]] Spectrum read_spectrum(const Item& item) {
    const std::string text = cards_of(file_);
    const HeaderCards cards(text, where(item.unit));
    Spectrum spectrum;
    spectrum.name = where(item.unit);
    const HeaderAxis axis = read_spectral_axis(cards.cards(), cards.where(), options_.axis);
    const long long values = product(lengths_of(cards));
    if (static_cast<long long>(axis.axis.size()) != values) {
      cards.refuse(fmt::format("the spectral axis {} has {} channels but the image {} values", axis.fits_axis,
                               axis.axis.size(), values),
                   "one spectrum");
    }
    spectrum.axis = axis.axis;
    spectrum.axis_type = axis.type;
    spectrum.frame = axis.frame;
    spectrum.rest_frequency_hz = axis.rest_frequency_hz;
    spectrum.warnings = axis.warnings;
    spectrum.intensity = read_image(file_, values);
    make_holes_of_infinities(spectrum.intensity);
    apply_unit(cards.text("BUNIT"), options_, cards.where(), spectrum);
    read_common_keywords(cards, spectrum);
    if (item.mask_unit > 0) {
      file_.go_to(item.mask_unit);
      const Eigen::ArrayXd mask = read_image(file_, values);
      spectrum.intensity = (mask == 0.0).select(spectrum.intensity, kNaN);
    }
    return spectrum;
  }

  std::string bytes_;
  SpectrumOptions options_;
  FitsFile file_;
  std::vector<Item> items_;
  long long last_values_ = 0;
  std::mutex mutex_;
};

}  // namespace

std::unique_ptr<SpectrumFile::Reader> make_fits_reader(std::string bytes, std::string name,
                                                       SpectrumOptions options) {
  return std::make_unique<FitsReader>(std::move(bytes), std::move(name), std::move(options));
}

}  // namespace trotline
