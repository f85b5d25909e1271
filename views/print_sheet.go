package views

// printFont names the faces of printed figures: the first two are metric twins,
// and the lines of captions are broken by their widths.
const printFont = `Liberation Sans,Arial,Helvetica,sans-serif`

// printSheet colours a figure that stands alone: the light theme on white. It
// is written into the elements, see styled.
const printSheet = `text{font-family:` + printFont + `;font-size:15;fill:#3A4750}.axis-label,.label{fill:#14212B}.label{font-size:14}.bold{font-weight:700}` +
	`.caption{font-size:14;fill:#14212B}.key{font-size:14;fill:#3A4750}.settings{font-size:11.5;fill:#5A666E}` +
	`.halo{paint-order:stroke;stroke:#fff;stroke-width:4;stroke-linejoin:round}.frame,.tick{stroke:#7C858C;fill:none}.grid{stroke:#E2DED4;fill:none}` +
	`.band{fill:#3A8EA1;fill-opacity:.18}.band.b2{fill:#B5762A}.line{fill:none;stroke:#164E65;stroke-width:2.25;stroke-linejoin:round}.line.l2{stroke:#B5762A}.line.l3{stroke:#4A5862}.line.l4{stroke:#3A8EA1}` +
	`.dash{stroke-dasharray:7 5}.dot-dash{stroke-dasharray:1.5 4;stroke-linecap:round}.rule{stroke:#4A5862;stroke-width:1.25;fill:none}` +
	`.mark{stroke:#20647A;fill:#20647A;fill-opacity:.75;stroke-width:1.25}.mark.ochre{stroke:#B5762A;fill:#B5762A}.mark.alarm{stroke:#A6322A;fill:#A6322A}.mark.soft{stroke:#80868A;fill:#80868A}` +
	`.mark.f0{fill:#80868A;stroke:#80868A}.mark.f1{fill:#3A8EA1;stroke:#3A8EA1}.mark.f2{fill:#2C7A8F;stroke:#2C7A8F}.mark.f3{fill:#20647A;stroke:#20647A}.mark.f4{fill:#164E65;stroke:#164E65}.mark.f5{fill:#0E384C;stroke:#0E384C}.mark.f6{fill:#082436;stroke:#082436}` +
	`.mark.hollow{fill:#fff;fill-opacity:1;stroke-width:1.75}.mark.ochre.hollow,.mark.alarm.hollow,.mark.soft.hollow{fill:#fff}.whisker{stroke:#4A5862;stroke-width:1.25;fill:none}` +
	`.box{fill:none;stroke:#D9D4C7;stroke-width:.8}` + chartSheet

// chartSheet is what only maps and ribbons have.
const chartSheet = `.sea{fill:#FFFFFF}.land{fill:#F1ECE0;stroke:#7C858C;stroke-width:.6}.equator{stroke:#7C858C}.practice{stroke:#4A5862;stroke-dasharray:5 4}` +
	`.scale{stroke:#14212B;stroke-width:1.5}.in-mark{font-size:10;font-weight:700;fill:#fff}.in-mark.on-paper{fill:#14212B}` +
	`.course{fill:none;stroke:#20647A;stroke-width:2;stroke-linejoin:round}.ribbon,.gap{fill:none;stroke-linecap:round;stroke-linejoin:round}.hit{fill:none}` +
	`.w0,.w1{stroke-width:1.6}.w2{stroke-width:2.4}.w3{stroke-width:3.3}.w4{stroke-width:4.4}.ribbon.twin.w0,.ribbon.twin.w1{stroke-width:4}.ribbon.twin.w2{stroke-width:4.8}.ribbon.twin.w3{stroke-width:5.6}.ribbon.twin.w4{stroke-width:6.6}.gap{stroke:#fff;stroke-width:1.7}` +
	`.r0{stroke:#80868A}.r1{stroke:#3A8EA1}.r2{stroke:#2C7A8F}.r3{stroke:#20647A}.r4{stroke:#164E65}.r5{stroke:#0E384C}.r6{stroke:#082436}` +
	`.course.river,.ribbon.river{stroke:#B5762A;stroke-dasharray:5 3.5;stroke-linecap:butt}.capped{stroke:#A6322A;stroke-width:1.6;fill:none}`
