package aim

import (
	"errors"
	"math"
	"math/rand/v2"
	"testing"
)

func TestAimDoubt(t *testing.T) {
	// The design's figure: 5 m at both ends of 300 m is 1.35°.
	from := End{at(47, 8, 400), 5}
	to := End{at(47+300/111_000.0, 8, 400), 5}
	a, err := Aim(from, to, StandardK)
	if err != nil {
		t.Fatal(err)
	}
	near(t, "5 m at 300 m", a.BearingDoubt/degree, 1.35, 0.005)
}

// The formula for the doubt against differences, near a pole too, where moving
// the near end turns its meridian.
func TestAimDoubtAgainstDraws(t *testing.T) {
	r := rand.New(rand.NewPCG(3, 4))
	for _, row := range []struct{ lat, bearing, u1, u2 float64 }{{47, 60, 5, 3}, {89.99, 20, 5, 0.1}, {89.99, 90, 10, 0.1}, {-89.99, 90, 10, 0.1}, {-60, 200, 0, 8}, {-89.9, 300, 6, 6}} {
		from := End{at(row.lat, 170, 100), row.u1}
		// 2 km along the bearing, in the horizon of the near end.
		move := func(p Position, east, north float64) Position {
			n := normalRadius(p.Lat)
			m := n * (1 - eccSquared) / (1 - eccSquared*math.Pow(math.Sin(p.Lat), 2))
			return Position{p.Lat + north/m, p.Lon + east/(n*math.Cos(p.Lat)), p.Height}
		}
		to := End{move(from.Position, 800*math.Sin(row.bearing*degree), 800*math.Cos(row.bearing*degree)), row.u2}
		a, err := Aim(from, to, StandardK)
		if err != nil {
			t.Fatal(err)
		}
		const draws = 20000
		sum := 0.0
		for range draws {
			f := move(from.Position, row.u1*r.NormFloat64(), row.u1*r.NormFloat64())
			g := move(to.Position, row.u2*r.NormFloat64(), row.u2*r.NormFloat64())
			d := HalfTurn(Sight(f, g).Bearing - a.TrueBearing)
			sum += d * d
		}
		got := math.Sqrt(sum / draws)
		// 20 000 draws know a standard deviation to 0.5 %; 3 of these, and 1 % for
		// the second order.
		near(t, "doubt at latitude "+string(rune('0'+int(math.Abs(row.lat))/10))+"0", a.BearingDoubt/got, 1, 0.025)
	}
}

func TestAimEdges(t *testing.T) {
	end := func(lat, lon, h float64) End { return End{at(lat, lon, h), 5} }
	if _, err := Aim(end(47, 8, 0), end(47, 8, 30), StandardK); !errors.Is(err, ErrSamePlace) {
		t.Errorf("one above the other: %v", err)
	}
	if _, err := Aim(end(90, 8, 0), end(89, 8, 30), StandardK); !errors.Is(err, ErrPole) {
		t.Errorf("from the pole: %v", err)
	}
	if _, err := Aim(end(10, 0, 0), end(-10, -180, 30), StandardK); !errors.Is(err, ErrNearAntipode) {
		t.Errorf("antipode: %v", err)
	}
	for _, pair := range [][2]End{
		{end(89.99, 10, 0), end(89.99, -170, 0)},
		{end(-89.99, 10, 0), end(-90, 0, 2800)},
		{end(0, 179.999, 0), end(0, -179.999, 0)},
		{end(89.99, 0, 0), end(90, 77, 0)},
	} {
		a, err := Aim(pair[0], pair[1], StandardK)
		if err != nil {
			t.Fatal(err)
		}
		for _, x := range []float64{a.TrueBearing, a.GeodesicBearing, a.GeometricElevation, a.Elevation, a.Distance, a.SlantRange, a.BearingDoubt} {
			if math.IsNaN(x) || math.IsInf(x, 0) {
				t.Errorf("%+v: %+v", pair, a)
			}
		}
	}
	// Over the antimeridian it is 222.4 m, not once round the earth.
	a, err := Aim(end(0, 179.999, 0), end(0, -179.999, 0), StandardK)
	if err != nil {
		t.Fatal(err)
	}
	near(t, "across the antimeridian", a.Distance, 222.639, 0.001)
	near(t, "east", a.TrueBearing/degree, 90, 1e-6)
	// Bent ray: 100 km at k = 4/3 leaves 0.1124° higher than the chord.
	near(t, "bend", RayBend(100_000, StandardK)/degree, 0.25*100/(2*6371)/degree, 1e-12)
	near(t, "no air, no bend", RayBend(100_000, 1), 0, 0)
}

// A sight made of a known azimuth comes back, read in the plane or in space.
func TestSightsComeBack(t *testing.T) {
	r := rand.New(rand.NewPCG(5, 6))
	tried := 0
	for range 5000 {
		truth := r.Float64() * fullTurn
		ref := Reference{Azimuth: r.Float64() * fullTurn, Elevation: (r.Float64()*118 - 59) * degree}
		tilt := (r.Float64()*40 - 20) * degree
		flat := HalfTurn(truth - ref.Azimuth)
		got, u, err := ref.Boresight(Reading{Angle: flat, AngleDoubt: 0.3 * degree})
		if err != nil {
			t.Fatal(err)
		}
		near(t, "in the plane", HalfTurn(got-truth)/degree, 0, 1e-9)
		near(t, "doubt in the plane", u/degree, math.Hypot(0.3, 0.1), 1e-12)

		// The angle in space by the dot product of the two unit vectors.
		sinH, cosH := math.Sincos(ref.Elevation)
		sinE, cosE := math.Sincos(tilt)
		space := math.Acos(math.Max(-1, math.Min(1, cosH*cosE*math.Cos(flat)+sinH*sinE)))
		got, _, err = ref.BoresightFromSpace(Reading{Angle: space}, tilt, flat > 0)
		if a := math.Abs(flat); a < NarrowSight-1e-9 || a > halfTurn-NarrowSight+1e-9 {
			if !errors.Is(err, ErrTooClose) {
				t.Fatalf("%.2f° was not refused: %v", flat/degree, err)
			}
			continue
		}
		if err != nil {
			t.Fatal(err)
		}
		near(t, "in space", HalfTurn(got-truth)/degree, 0, 1e-9)
		tried++
	}
	if tried < 3000 {
		t.Errorf("only %d sights tried", tried)
	}
}

// The doubt of a space angle against draws of everything that is doubted.
func TestSpaceSightDoubtAgainstDraws(t *testing.T) {
	r := rand.New(rand.NewPCG(7, 8))
	ref := Reference{Azimuth: 140 * degree, Elevation: 35 * degree, Doubt: 0.05 * degree}
	for _, tilt := range []float64{-4 * degree, 40 * degree} {
		reading := Reading{Angle: 55 * degree, AngleDoubt: 0.4 * degree, LevelDoubt: 0.3 * degree}
		azimuth, u, err := ref.BoresightFromSpace(reading, tilt, true)
		if err != nil {
			t.Fatal(err)
		}
		const draws = 40000
		sum := 0.0
		for range draws {
			moved := Reference{Azimuth: ref.Azimuth + ref.Doubt*r.NormFloat64() + SightDoubt*r.NormFloat64(), Elevation: ref.Elevation}
			got, _, err := moved.BoresightFromSpace(Reading{Angle: reading.Angle + reading.AngleDoubt*r.NormFloat64()}, tilt+reading.LevelDoubt*r.NormFloat64(), true)
			if err != nil {
				t.Fatal(err)
			}
			got += math.Tan(ref.Elevation) * reading.LevelDoubt * r.NormFloat64()
			d := HalfTurn(got - azimuth)
			sum += d * d
		}
		near(t, "doubt", u/math.Sqrt(sum/draws), 1, 0.02)
	}
}

func TestSunReference(t *testing.T) {
	vienna := at(48.2082, 16.3738, 170)
	if _, err := SunReference(vienna, Date(2026, 6, 21, 0), 2, StandardAir); !errors.Is(err, ErrBelowHorizon) {
		t.Errorf("midnight: %v", err)
	}
	if _, err := SunReference(vienna, Date(2026, 6, 21, 11*3600), 2, StandardAir); !errors.Is(err, ErrTooHigh) {
		t.Errorf("midsummer noon: %v", err)
	}
	ref, err := SunReference(vienna, Date(2026, 11, 30, 9*3600), 60, StandardAir)
	if err != nil {
		t.Fatal(err)
	}
	// In winter at this latitude the azimuth moves about 13° an hour: a minute's
	// doubt is about 0.22°.
	near(t, "a minute", ref.Doubt/degree, 0.22, 0.02)
	if _, _, err := (Reference{Elevation: 61 * degree}).Boresight(Reading{}); !errors.Is(err, ErrSteep) {
		t.Errorf("steep: %v", err)
	}
	if _, _, err := (Reference{Elevation: 30 * degree}).BoresightFromSpace(Reading{Angle: 5 * degree}, 0, true); !errors.Is(err, ErrNoTriangle) {
		t.Errorf("no triangle: %v", err)
	}
}
