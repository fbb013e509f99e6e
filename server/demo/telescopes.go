package demo

import "cadencewright/scheduler"

// The codes of the five telescopes.
const (
	wolkenried = "WKR" // alt-azimuth, Europe
	kvitvarden = "KVV" // alt-azimuth, beyond the Arctic Circle
	kestrel    = "KES" // equatorial, North America
	quandong   = "QDG" // transit, Australia
	saltbush   = "SBP" // alt-azimuth with a wide-band receiver, Australia
)

// telescopes invents the five. Sizes, temperatures and drives are those usual
// for dishes of the kind (common practice); names and places are no real ones.
// Between them they show each mount, a cable wrap that matters, a horizon with
// hills, and bands P (about 400 MHz), U (800), L (1400) and S (2700), one
// receiver covering three of them at once.
func telescopes() []scheduler.Telescope { return append(northern(), southern()...) }

// northern are the two in Europe and the one in North America.
func northern() []scheduler.Telescope {
	return []scheduler.Telescope{
		{
			Code: wolkenried, Name: "Wolkenried 80 m", LongitudeDeg: 10.7312, LatitudeDeg: 49.5871, HeightM: 412, Timezone: "Europe/Berlin",
			Mount: scheduler.MountAltAz, ElevationMinDeg: 8, ElevationMaxDeg: 88, SunMinDeg: 5,
			Horizon: []scheduler.HorizonPoint{{AzimuthDeg: 0, ElevationDeg: 6}, {AzimuthDeg: 60, ElevationDeg: 9.5},
				{AzimuthDeg: 130, ElevationDeg: 11},
				{AzimuthDeg: 175, ElevationDeg: 7}, {AzimuthDeg: 240, ElevationDeg: 8.5}, {AzimuthDeg: 310, ElevationDeg: 12.5}},
			// A heavy dish: slow to set up, slow to turn. From one end of its wrap
			// to the other takes twenty minutes.
			SetupS: 900, CalS: 60, SwitchS: 90, SettleS: 15,
			AzimuthRangeDeg: [2]float64{-160, 360}, RateAzDegS: 0.4, RateElDegS: 0.2, AccelAzDegS2: 0.04, AccelElDegS2: 0.03,
			Receivers: []scheduler.Receiver{
				{Code: "L1", Bands: []string{"L"}, FreqMHz: 1400, BandwidthMHz: 400, NPol: 2, TrecK: 19.5, TatmK: 3.2, GainKPerJy: 1.15,
					Digitisation: 1, RFILoss: businessHours},
				{Code: "S1", Bands: []string{"S"}, FreqMHz: 2650, BandwidthMHz: 700, NPol: 2, TrecK: 23, TatmK: 3.5, GainKPerJy: 1.1,
					Digitisation: 1},
				{Code: "U1", Bands: []string{"U"}, FreqMHz: 820, BandwidthMHz: 240, NPol: 2, TrecK: 27, TatmK: 3, GainKPerJy: 1.18,
					Digitisation: 1.03, RFILoss: businessHours},
			},
		},
		{
			Code: kvitvarden, Name: "Kvitvarden 45 m", LongitudeDeg: 20.4186, LatitudeDeg: 68.3327, HeightM: 505, Timezone: "Europe/Oslo",
			Mount: scheduler.MountAltAz, ElevationMinDeg: 6, ElevationMaxDeg: 86, SunMinDeg: 3,
			Horizon: []scheduler.HorizonPoint{{AzimuthDeg: 20, ElevationDeg: 4}, {AzimuthDeg: 95, ElevationDeg: 14},
				{AzimuthDeg: 125, ElevationDeg: 9},
				{AzimuthDeg: 200, ElevationDeg: 5.5}, {AzimuthDeg: 285, ElevationDeg: 17}, {AzimuthDeg: 330, ElevationDeg: 6}},
			SetupS: 600, CalS: 60, SwitchS: 60, SettleS: 10,
			AzimuthRangeDeg: [2]float64{-270, 270}, RateAzDegS: 1.1, RateElDegS: 0.6, AccelAzDegS2: 0.15, AccelElDegS2: 0.1,
			Receivers: []scheduler.Receiver{
				{Code: "L1", Bands: []string{"L"}, FreqMHz: 1420, BandwidthMHz: 350, NPol: 2, TrecK: 17, TatmK: 2.5, GainKPerJy: 0.42,
					Digitisation: 1},
				{Code: "S1", Bands: []string{"S"}, FreqMHz: 2700, BandwidthMHz: 800, NPol: 2, TrecK: 19, TatmK: 2.8, GainKPerJy: 0.41,
					Digitisation: 1},
			},
		},
		{
			Code: kestrel, Name: "Kestrel Flat Polar", LongitudeDeg: -116.9043, LatitudeDeg: 40.2788, HeightM: 1640,
			Timezone: "America/Los_Angeles",
			Mount:    scheduler.MountEquatorial, ElevationMinDeg: 10, ElevationMaxDeg: 90, SunMinDeg: 5,
			SetupS: 600, CalS: 60, SwitchS: 150, SettleS: 20,
			// An old polar mount: no zenith to avoid, but no way past six hours.
			HourAngleRangeH: [2]float64{-5.5, 5.5}, RateHADegS: 0.35, RateDecDegS: 0.3, AccelHADegS2: 0.03, AccelDecDegS2: 0.03,
			Receivers: []scheduler.Receiver{
				{Code: "L1", Bands: []string{"L"}, FreqMHz: 1380, BandwidthMHz: 320, NPol: 2, TrecK: 20, TatmK: 2.2, GainKPerJy: 0.95,
					Digitisation: 1},
				{Code: "P1", Bands: []string{"P"}, FreqMHz: 420, BandwidthMHz: 80, NPol: 2, TrecK: 42, TatmK: 2, GainKPerJy: 1,
					Digitisation: 1.05},
			},
		},
	}
}

// southern are the two in Australia.
func southern() []scheduler.Telescope {
	return []scheduler.Telescope{
		{
			Code: quandong, Name: "Quandong Downs Transit", LongitudeDeg: 138.2254, LatitudeDeg: -30.6419, HeightM: 148,
			Timezone: "Australia/Adelaide",
			Mount:    scheduler.MountTransit, ElevationMinDeg: 15, ElevationMaxDeg: 90, SunMinDeg: 4,
			SetupS: 300, CalS: 30, SwitchS: 60, SettleS: 10,
			// A reflector fixed in azimuth: great area, each source for less than
			// two hours a day.
			TrackHalfMin: 50, RateElDegS: 0.12, AccelElDegS2: 0.01,
			Receivers: []scheduler.Receiver{
				{Code: "U1", Bands: []string{"U"}, FreqMHz: 780, BandwidthMHz: 320, NPol: 2, TrecK: 30, TatmK: 2, GainKPerJy: 1.9,
					Digitisation: 1},
				{Code: "L1", Bands: []string{"L"}, FreqMHz: 1330, BandwidthMHz: 250, NPol: 2, TrecK: 28, TatmK: 2, GainKPerJy: 1.7,
					Digitisation: 1},
			},
		},
		{
			Code: saltbush, Name: "Saltbush Plain 65 m", LongitudeDeg: 143.8127, LatitudeDeg: -33.9046, HeightM: 121,
			Timezone: "Australia/Sydney",
			Mount:    scheduler.MountAltAz, ElevationMinDeg: 12, ElevationMaxDeg: 89, SunMinDeg: 5,
			SetupS: 600, CalS: 60, SwitchS: 120, SettleS: 10,
			AzimuthRangeDeg: [2]float64{-270, 270}, RateAzDegS: 0.5, RateElDegS: 0.3, AccelAzDegS2: 0.05, AccelElDegS2: 0.05,
			Receivers: []scheduler.Receiver{
				{Code: "W1", Bands: []string{"U", "L", "S"}, FreqMHz: 1800, BandwidthMHz: 2200, NPol: 2, TrecK: 24, TatmK: 2.4,
					GainKPerJy: 0.75, Digitisation: 1},
				{Code: "L1", Bands: []string{"L"}, FreqMHz: 1370, BandwidthMHz: 300, NPol: 2, TrecK: 18, TatmK: 2.2, GainKPerJy: 0.8,
					Digitisation: 1},
			},
		},
	}
}

// businessHours is interference that follows people: little at night, much
// while offices and roads are busy.
var businessHours = []float64{
	0.05, 0.05, 0.05, 0.05, 0.06, 0.1, 0.18, 0.28, 0.33, 0.35, 0.35, 0.34,
	0.32, 0.34, 0.35, 0.33, 0.3, 0.28, 0.24, 0.2, 0.16, 0.12, 0.08, 0.06,
}
