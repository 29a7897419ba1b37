package calculation

import "testing"

func TestSeparatorIsFoundFromTheHeaderLine(t *testing.T) {
	for _, c := range []struct {
		name, head string
		want       byte
	}{
		{"trips.csv", "depot,minutes\nNorth,12\n", ','},
		{"trips.csv", "depot;minutes\nNorth;12,5\n", ';'},
		{"trips.csv", "depot\tminutes\nNorth\t12,5\n", '\t'},
		{"trips.csv", "\xef\xbb\xbf\"a,b\";\"c,d\"\r\n", ';'},
		{"trips.csv", "Trips of May\n\ndepot;minutes\n", ';'},
		{"trips.csv", "minutes\n12\n", ','},
		{"trips.csv", "\"a\nb,c\";d\n", ';'},
		{"trips.tsv", "a,b,c\n", '\t'},
		{"x.calculations.csv", "a remark, with a comma\nwork out;sample;> mean\nmean-interval;12, 13\n", ';'},
		{"x.calculations.csv", "work out,sample,> mean\nmean-interval,12; 13; 14; 15\n", ','},
		{"x.calculations.csv", "We work out means, then a sum, by depot\nWork Out: mean-interval (by depot);sample;> mean\nmean-interval;12, 13\n", ';'},
		{"x.calculations.csv", "work-out,minutes in trips.csv where depot = \"a;b;c;d\",> mean\n", ','},
		{"trips.csv", "depot,\"minutes; net\nof; rest\"\n", ','},
		{"trips.csv", "depot;5\" boxes\nNorth;3\nMill, North;\"2\"\n", ';'},
		{"trips.csv", "depot,minutes\nNorth,\"12; 13; 14\"\n", ','},
		{"empty.csv", "", ','},
	} {
		if got := findDialect(c.name, []byte(c.head), false).separator; got != c.want {
			t.Errorf("%q: separator %q, want %q", c.head, got, c.want)
		}
	}
	for head, want := range map[string]byte{"minutes\n1,5\n": ';', "minutes, net\n\"1,5\",2\n": ',', "a,b\n": ',', "up to 1,5\ndepot;minutes\n": ';', "minutes\n12\n": ';'} {
		if got := findDialect("trips.csv", []byte(head), true).separator; got != want {
			t.Errorf("%q with decimal commas: separator %q, want %q", head, got, want)
		}
	}
}
