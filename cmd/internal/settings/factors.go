package settings

import (
	"bytes"
	"reflect"
	"slices"
	"strings"
	"unicode/utf8"

	"cedewright/configs"
	"cedewright/portfolio/capital"
	"cedewright/portfolio/fault"
)

// factorFile is a file of factors of the standard formula.
type factorFile struct {
	Name               string           `key:"name,required"`
	Version            string           `key:"version,required"`
	Segments           []factorSegment  `key:"segments,required"`
	SegmentCorrelation [][]Number       `key:"segment_correlation,required"`
	PremiumReserve     Number           `key:"premium_reserve,required"`
	Multiple           Number           `key:"multiple,required"`
	Diversification    Fraction         `key:"diversification,required"`
	Patterns           []factorPattern  `key:"patterns,required"`
	ManMade            []string         `key:"man_made,required"`
	PremiumCatastrophe Number           `key:"premium_catastrophe,required"`
	PremiumLapse       Number           `key:"premium_lapse,required"`
	CatastropheLapse   Number           `key:"catastrophe_lapse,required"`
	Modules            []string         `key:"modules,required"`
	ModuleMatrix       [][]Number       `key:"module_matrix,required"`
	Steps              []Fraction       `key:"steps,required"`
	Solvency           []factorSolvency `key:"solvency,required"`
	LossGiven          Fraction         `key:"loss_given,required"`
	LossGivenTied      Fraction         `key:"loss_given_tied,required"`
	Mitigating         Fraction         `key:"mitigating,required"`
	CollateralUsed     Fraction         `key:"collateral_used,required"`
	Low                Fraction         `key:"low,required"`
	High               Fraction         `key:"high,required"`
	LowMultiple        Number           `key:"low_multiple,required"`
	HighMultiple       Number           `key:"high_multiple,required"`
	TypesCross         Number           `key:"types_cross,required"`
}

type factorSegment struct {
	Number          Count    `key:"number,required"`
	Name            string   `key:"name,required"`
	Premium         Fraction `key:"premium,required"`
	Reserve         Fraction `key:"reserve,required"`
	NonProportional Fraction `key:"non_proportional,required"`
}

type factorPattern struct {
	Kind         string       `key:"kind,required"`
	Alternatives [][]Fraction `key:"alternatives,required"`
}

type factorSolvency struct {
	Ratio       Fraction `key:"ratio,required"`
	Probability Fraction `key:"probability,required"`
}

// shippedFactors names the factor files that come with the program, each by the name inside it.
var shippedFactors = map[string]string{"eu-2015-35": "standard-formula-2015-35.yaml"}

// ShippedFactors gives the factor file of that name, and whether one ships. ReadFactors reads it.
func ShippedFactors(name string) ([]byte, bool) {
	file, ok := shippedFactors[name]
	if !ok {
		return nil, false
	}
	data, err := configs.Factors.ReadFile(file)
	return data, err == nil
}

// ShippedFactorNames lists the names that ShippedFactors knows.
func ShippedFactorNames() []string {
	var list []string
	for name := range shippedFactors {
		list = append(list, name)
	}
	slices.Sort(list)
	return list
}

const oneFactorFile = "one file of factors in YAML, such as the shipped standard-formula-2015-35.yaml"

// ReadFactors reads factors of the standard formula from the bytes of a YAML file; file is its name in messages. It fails with every fault that the
// file has, each with line, column and key.
func ReadFactors(data []byte, file string) (capital.Factors, error) {
	whole := func(found string) error { return &fault.Fault{File: file, Found: found, Allowed: oneFactorFile} }
	text := bytes.TrimPrefix(data, []byte("\xef\xbb\xbf"))
	switch {
	case len(data) > largestStudy:
		return capital.Factors{}, whole("more than 16 MiB")
	case len(bytes.TrimSpace(text)) == 0:
		return capital.Factors{}, whole("the file is empty")
	case bytes.IndexByte(text, 0) >= 0 || !utf8.Valid(text):
		return capital.Factors{}, whole("the file is not text in UTF-8")
	}
	root, err := yamlNodes(bytes.ReplaceAll(text, []byte("\r\n"), []byte("\n")), file)
	if err != nil {
		for _, f := range fault.All(err) {
			if strings.Contains(f.Allowed, "study") {
				f.Allowed = oneFactorFile
			}
		}
		return capital.Factors{}, err
	}
	var read factorFile
	d := decoder{file: file, places: map[string]place{}}
	d.decode(root, reflect.ValueOf(&read).Elem(), "")
	factors := read.factors()
	if len(d.broken) <= mostBroken {
		c := &checker{s: Study{File: file, places: d.places}, d: &d}
		for _, f := range fault.All(factors.Validate()) {
			c.take(*f)
		}
	}
	if err := tidy(file, d.faults.Err()); err != nil {
		return capital.Factors{}, err
	}
	return factors, nil
}

// factors gives the factors that the keys describe.
func (f factorFile) factors() capital.Factors {
	factors := capital.Factors{
		Name: f.Name, Version: f.Version,
		SegmentCorrelation: plainMatrix(f.SegmentCorrelation), PremiumReserve: float64(f.PremiumReserve), Multiple: float64(f.Multiple),
		Diversification: float64(f.Diversification), ManMade: f.ManMade, PremiumCat: float64(f.PremiumCatastrophe), PremiumLapse: float64(f.PremiumLapse),
		CatLapse: float64(f.CatastropheLapse), Modules: f.Modules, ModuleMatrix: plainMatrix(f.ModuleMatrix), Steps: plainNumbers(f.Steps),
		LossGiven: float64(f.LossGiven), LossGivenTied: float64(f.LossGivenTied), Mitigating: float64(f.Mitigating), CollateralUsed: float64(f.CollateralUsed),
		Low: float64(f.Low), High: float64(f.High), LowMultiple: float64(f.LowMultiple), HighMultiple: float64(f.HighMultiple),
		TypesCross: float64(f.TypesCross),
	}
	for _, s := range f.Segments {
		factors.Segments = append(factors.Segments, capital.Segment{
			Number: int(s.Number), Name: s.Name, Premium: float64(s.Premium), Reserve: float64(s.Reserve), NonProportional: float64(s.NonProportional),
		})
	}
	for _, p := range f.Patterns {
		factors.Patterns = append(factors.Patterns, capital.Pattern{Kind: p.Kind, Alternatives: plainMatrix(p.Alternatives)})
	}
	for _, s := range f.Solvency {
		factors.Solvency = append(factors.Solvency, capital.SolvencyStep{Ratio: float64(s.Ratio), Probability: float64(s.Probability)})
	}
	return factors
}

func plainNumbers[T ~float64](given []T) []float64 {
	list := make([]float64, len(given))
	for i, x := range given {
		list[i] = float64(x)
	}
	return list
}

func plainMatrix[T ~float64](rows [][]T) [][]float64 {
	list := make([][]float64, len(rows))
	for i, row := range rows {
		list[i] = plainNumbers(row)
	}
	return list
}
