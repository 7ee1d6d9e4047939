// What the readers of spectra share.
#pragma once

#include <memory>
#include <string>
#include <string_view>
#include <vector>

#include <trotline/observation/spectrum.hpp>

#include "fits_file.hpp"
#include "header_cards.hpp"

namespace trotline {

class SpectrumFile::Reader {
 public:
  Reader() = default;
  virtual ~Reader() = default;
  Reader(const Reader&) = delete;
  Reader& operator=(const Reader&) = delete;
  [[nodiscard]] virtual std::size_t size() const = 0;
  [[nodiscard]] virtual Spectrum read(std::size_t index) = 0;
  std::vector<std::string> warnings;
};

/// @param bytes  of the whole file, unpacked
std::unique_ptr<SpectrumFile::Reader> make_fits_reader(std::string bytes, std::string name,
                                                       SpectrumOptions options);
std::unique_ptr<SpectrumFile::Reader> make_text_reader(std::string_view bytes, const std::string& name,
                                                       const SpectrumOptions& options);

/// Unpacks a gzip file. @throws InputError when it is damaged, cut short or would become too large
std::string gunzip(std::string_view bytes, const std::string& name);

/// How many K or Jy/beam one unit is, and on which scale, as far as the unit says that.
struct IntensityUnit {
  double factor = 1.0;
  std::optional<IntensityScale> scale;
};

/// Understands K, mK, "K (Ta*)", Jy/beam, mJy/beam and other spellings. @throws InputError for anything else
IntensityUnit parse_intensity_unit(const std::string& text, const std::string& where);

/// Multiplies the intensities and sets the scale from unit and options.
void apply_unit(const std::optional<std::string>& unit, const SpectrumOptions& options,
                const std::string& where, Spectrum& spectrum);

/// Object, beam, efficiencies and resolution from keywords, where they make sense.
void read_common_keywords(const HeaderCards& cards, Spectrum& spectrum);

/// Infinite values are no measurements either.
void make_holes_of_infinities(Eigen::ArrayXd& intensity);

/// One extension of a FITS file that holds spectra in rows of a table.
class SpectrumTable {
 public:
  /// The current unit of `file`, a binary table. Nothing in it is read yet.
  SpectrumTable(const FitsFile& file, int unit, std::string where);

  /// True when the table has a column of spectra.
  [[nodiscard]] bool has_spectra() const { return data_column_ > 0; }
  [[nodiscard]] std::size_t rows() const { return rows_; }
  [[nodiscard]] Spectrum read(std::size_t row, const SpectrumOptions& options);

 private:
  struct VirtualColumn {
    std::string keyword;
    int column;
    bool is_text;
  };

  void find_columns();
  [[nodiscard]] int column_named(const std::string& name) const;
  [[nodiscard]] std::string header_of_row(std::size_t row) const;
  [[nodiscard]] std::string cell_card(const VirtualColumn& column, std::size_t row) const;
  void read_data(std::size_t row, Spectrum& spectrum) const;
  void require_one_spectrum_a_row() const;

  const FitsFile& file_;
  int unit_;
  std::string where_;
  std::size_t rows_ = 0;
  int data_column_ = 0;
  int mask_column_ = 0;
  std::size_t channels_ = 0;
  std::vector<VirtualColumn> virtual_columns_;
  std::string shared_cards_;  ///< keywords of the header that no column replaces
  std::string last_cards_;    ///< of the axis that was parsed last
  HeaderAxis last_axis_;
};

}  // namespace trotline
