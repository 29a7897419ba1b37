package workbook

import "strings"

// other writes a part of another vocabulary than SpreadsheetML.
func other(root, space, content string) string {
	return xmlHead + `<` + root + ` xmlns="` + space + `" xmlns:r="` + officeSpace + `">` + content + `</` + root + `>`
}

const drawingSpace = "http://schemas.openxmlformats.org/drawingml/2006/"

// typed gives a relationship of a type beyond the office document's own.
func typed(id, kind, target string) string {
	return `<Relationship Id="` + id + `" Type="http://schemas.microsoft.com/` + kind + `" Target="` + target + `"/>`
}

// parts writes the book. Its zip entries have times, comments, extra fields, data
// descriptors and stored data here and there, as different programs write them.
func (v richBook) parts() parts {
	main := func(root, content string) string {
		return v.form(xmlHead + `<` + root + ` xmlns="` + mainSpace + `"` + spaces + `>` + content + `</` + root + `>`)
	}
	rels := func(list ...string) string {
		all := relsA + strings.Join(list, "") + `</Relationships>`
		if v.strict {
			all = strings.ReplaceAll(all, officeSpace, strictOffice)
		}
		return all
	}
	epoch := ""
	if v.date1904 {
		epoch = ` date1904="1"`
	}
	blob := strings.Repeat("\x00\x01macro\xFF", 500)
	list := parts{
		{name: typesPart, data: richTypes},
		{name: rootRels, data: rels(relation("rId1", "officeDocument", "xl/workbook.xml"), relation("rId2", "extended-properties", "docProps/app.xml"), relation("rId3", "custom-properties", "docProps/custom.xml"),
			`<Relationship Id="rId4" Type="`+packSpace+`relationships/metadata/core-properties" Target="docProps/core.xml"/>`)},
		{name: workbookPart, data: main("workbook", `<fileVersion appName="xl" lastEdited="7"/><workbookPr codeName="ThisWorkbook"`+epoch+`/><mc:AlternateContent><mc:Choice Requires="x15"><a:absPath xmlns:a="urn:a" url="C:\"/></mc:Choice></mc:AlternateContent>`+
			`<bookViews><workbookView activeTab="1"/></bookViews><sheets><sheet name="Trips" sheetId="1" r:id="rId1"/><sheet name="Calculations" sheetId="4" r:id="rId2"/><sheet name="Pivot" sheetId="9" state="hidden" r:id="rId3"/><sheet name="Chart" sheetId="5" r:id="rId4"/></sheets>`+
			`<externalReferences><externalReference r:id="rId9"/></externalReferences><definedNames><definedName name="_xlnm.Print_Titles" localSheetId="0">Trips!$1:$3</definedName><definedName name="late" hidden="1">Trips!$D$4:$D$15</definedName><definedName name="Slicer_depot">#N/A</definedName></definedNames>`+
			`<calcPr calcId="191029"/><pivotCaches><pivotCache cacheId="0" r:id="rId10"/></pivotCaches><extLst><ext uri="{BBE1A952-AA13-448e-AADC-164F8A28A991}"><x14:slicerCaches><x14:slicerCache r:id="rId11"/></x14:slicerCaches></ext></extLst>`)},
		{name: workbookRels, data: rels(relation("rId1", "worksheet", "worksheets/sheet1.xml"), relation("rId2", "worksheet", "worksheets/sheet2.xml"), relation("rId3", "worksheet", "worksheets/sheet3.xml"), relation("rId4", "chartsheet", "chartsheets/sheet1.xml"),
			relation("rId5", "theme", "theme/theme1.xml"), relation("rId6", "styles", "styles.xml"), relation("rId7", "sharedStrings", "sharedStrings.xml"), relation("rId8", "calcChain", "calcChain.xml"), relation("rId9", "externalLink", "externalLinks/externalLink1.xml"),
			relation("rId10", "pivotCacheDefinition", "pivotCache/pivotCacheDefinition1.xml"), typed("rId11", "office/2007/relationships/slicerCache", "slicerCaches/slicerCache1.xml"), typed("rId12", "office/2006/relationships/vbaProject", "vbaProject.bin"),
			typed("rId13", "office/2017/10/relationships/person", "persons/person.xml"), relation("rId14", "sheetMetadata", "metadata.xml"), relation("rId15", "customXml", "../customXml/item1.xml"))},
		{name: tripsPart, data: v.form(v.tripsSheet())},
		{name: questionPart, data: v.form(v.calculationSheet())},
		{name: "xl/worksheets/sheet3.xml", data: main("worksheet", `<sheetData/>`)},
		{name: "xl/chartsheets/sheet1.xml", data: main("chartsheet", `<sheetViews><sheetView workbookViewId="0"/></sheetViews><drawing r:id="rId1"/>`)},
		{name: "xl/worksheets/_rels/sheet1.xml.rels", data: rels(relation("rId1", "printerSettings", "../printerSettings/printerSettings1.bin"), relation("rId2", "drawing", "../drawings/drawing1.xml"), relation("rId3", "vmlDrawing", "../drawings/vmlDrawing1.vml"),
			relation("rId4", "table", "../tables/table1.xml"), relation("rId5", "comments", "../comments1.xml"), typed("rId6", "office/2017/10/relationships/threadedComment", "../threadedComments/threadedComment1.xml"), typed("rId7", "office/2007/relationships/slicer", "../slicers/slicer1.xml"),
			relation("rId8", "ctrlProp", "../ctrlProps/ctrlProp1.xml"), `<Relationship Id="rId9" Type="`+officeSpace+`/hyperlink" Target="https://parcels.example/?a=1&amp;b=2" TargetMode="External"/>`)},
		{name: "xl/worksheets/_rels/sheet3.xml.rels", data: rels(relation("rId1", "pivotTable", "../pivotTables/pivotTable1.xml"))},
		{name: "xl/chartsheets/_rels/sheet1.xml.rels", data: rels(relation("rId1", "drawing", "../drawings/drawing2.xml"))},
		{name: stringsPart, data: main("sst", `<si>`+strings.Join(richWords, `</si><si>`)+`</si>`)},
		{name: stylesPart, data: main("styleSheet", `<numFmts count="1"><numFmt numFmtId="164" formatCode="0.000\ "/></numFmts><fonts count="2"><font><sz val="11"/></font><font><b/><sz val="14"/></font></fonts><fills count="1"><fill><patternFill patternType="none"/></fill></fills><borders count="1"><border/></borders>`+
			`<cellStyleXfs count="1"><xf/></cellStyleXfs><cellXfs count="6"><xf numFmtId="0"/><xf numFmtId="0" fontId="1" applyFont="1"/><xf numFmtId="49"/><xf numFmtId="164"/><xf numFmtId="14"/><xf numFmtId="2"/></cellXfs><cellStyles count="1"><cellStyle name="Normal" xfId="0" builtinId="0"/></cellStyles>`+
			`<dxfs count="1"><dxf><font><b/></font></dxf></dxfs><tableStyles count="0" defaultTableStyle="TableStyleMedium2"/><extLst><ext uri="{EB79DEF2-80B8-43e5-95BD-54CBDDF9020C}"><x14:slicerStyles defaultSlicerStyle="SlicerStyleLight1"/></ext></extLst>`)},
		{name: "xl/theme/theme1.xml", data: other("theme", drawingSpace+"main", `<themeElements/>`)},
		{name: "xl/calcChain.xml", data: main("calcChain", `<c r="E4" i="1" l="1"/><c r="F2" i="1"/>`)},
		{name: "xl/metadata.xml", data: main("metadata", `<metadataTypes count="1"><metadataType name="XLDAPR" minSupportedVersion="120000" copy="1"/></metadataTypes><cellMetadata count="1"><bk><rc t="1" v="0"/></bk></cellMetadata>`)},
		{name: "xl/vbaProject.bin", data: "\xD0\xCF\x11\xE0" + blob},
		{name: "xl/externalLinks/externalLink1.xml", data: main("externalLink", `<externalBook r:id="rId1"><sheetNames><sheetName val="Trips"/></sheetNames></externalBook>`)},
		{name: "xl/externalLinks/_rels/externalLink1.xml.rels", data: rels(`<Relationship Id="rId1" Type="` + officeSpace + `/externalLinkPath" Target="other.xlsx" TargetMode="External"/>`)},
		{name: "xl/pivotCache/pivotCacheDefinition1.xml", data: main("pivotCacheDefinition", `<cacheSource type="worksheet"><worksheetSource name="Deliveries"/></cacheSource><cacheFields count="1"><cacheField name="depot"/></cacheFields>`)},
		{name: "xl/pivotCache/_rels/pivotCacheDefinition1.xml.rels", data: rels(relation("rId1", "pivotCacheRecords", "pivotCacheRecords1.xml"))},
		{name: "xl/pivotCache/pivotCacheRecords1.xml", data: main("pivotCacheRecords", `<r><s v="North"/></r>`)},
		{name: "xl/pivotTables/pivotTable1.xml", data: main("pivotTableDefinition", `<location ref="A3:B7" firstHeaderRow="1" firstDataRow="1" firstDataCol="1"/>`)},
		{name: "xl/slicerCaches/slicerCache1.xml", data: other("slicerCacheDefinition", "http://schemas.microsoft.com/office/spreadsheetml/2009/9/main", ``)},
		{name: "xl/slicers/slicer1.xml", data: other("slicers", "http://schemas.microsoft.com/office/spreadsheetml/2009/9/main", `<slicer name="depot" cache="Slicer_depot"/>`)},
		{name: "xl/persons/person.xml", data: other("personList", "http://schemas.microsoft.com/office/spreadsheetml/2018/threadedcomments", `<person displayName="A. Reader" id="{1}"/>`)},
		{name: "xl/threadedComments/threadedComment1.xml", data: other("ThreadedComments", "http://schemas.microsoft.com/office/spreadsheetml/2018/threadedcomments", `<threadedComment ref="B4" personId="{1}" id="{2}"><text>late?</text></threadedComment>`)},
		{name: "xl/comments1.xml", data: main("comments", `<authors><author>tc={2}</author></authors><commentList><comment ref="B4" authorId="0"><text><t>[Threaded comment]</t></text></comment></commentList>`)},
		{name: "xl/tables/table1.xml", data: strings.Replace(main("table", `<autoFilter ref="A3:E15"><filterColumn colId="0"><filters><filter val="North"/></filters></filterColumn></autoFilter><tableColumns count="5"><tableColumn id="1" name="depot"/><tableColumn id="2" name="minutes"/><tableColumn id="3" name="date"/><tableColumn id="4" name="on-time"/><tableColumn id="5" name="hours"><calculatedColumnFormula>Deliveries[[#This Row],[minutes]]/60</calculatedColumnFormula></tableColumn></tableColumns><tableStyleInfo name="TableStyleMedium2" showRowStripes="1"/>`), "table ", `table id="1" name="Deliveries" displayName="Deliveries" ref="A3:E15" `, 1)},
		{name: "xl/drawings/drawing1.xml", data: other("wsDr", drawingSpace+"spreadsheetDrawing", `<twoCellAnchor><pic/></twoCellAnchor>`)},
		{name: "xl/drawings/_rels/drawing1.xml.rels", data: rels(relation("rId1", "chart", "../charts/chart1.xml"), relation("rId2", "image", "../media/image1.png"))},
		{name: "xl/drawings/drawing2.xml", data: other("wsDr", drawingSpace+"spreadsheetDrawing", ``)},
		{name: "xl/drawings/vmlDrawing1.vml", data: `<xml xmlns:v="urn:schemas-microsoft-com:vml"><v:shape id="_x0000_s1025"><br></v:shape></xml>`},
		{name: "xl/charts/chart1.xml", data: other("chartSpace", drawingSpace+"chart", `<chart><f>Trips!$B$4:$B$15</f></chart>`)},
		{name: "xl/media/image1.png", data: "\x89PNG\r\n\x1A\n" + blob, store: true},
		{name: "xl/ctrlProps/ctrlProp1.xml", data: other("formControlPr", "http://schemas.microsoft.com/office/spreadsheetml/2009/9/main", ``)},
		{name: "xl/printerSettings/printerSettings1.bin", data: "P\x00r\x00" + blob},
		{name: "customXml/item1.xml", data: `<routes xmlns="urn:larkmoor"><route>7</route></routes>`},
		{name: "customXml/itemProps1.xml", data: other("datastoreItem", "http://schemas.openxmlformats.org/officeDocument/2006/customXml", ``)},
		{name: "customXml/_rels/item1.xml.rels", data: rels(relation("rId1", "customXmlProps", "itemProps1.xml"))},
		{name: "docProps/core.xml", data: other("coreProperties", packSpace+"metadata/core-properties", `<version>1</version>`)},
		{name: "docProps/app.xml", data: other("Properties", "http://schemas.openxmlformats.org/officeDocument/2006/extended-properties", `<TotalTime>0</TotalTime>`)},
		{name: "docProps/custom.xml", data: other("Properties", "http://schemas.openxmlformats.org/officeDocument/2006/custom-properties", ``)},
		{name: "Unknown/thing.dat", data: blob, store: true},
		{name: "xl/empty.part"},
	}
	for i := range list {
		e := &list[i]
		e.time = [2]uint16{uint16(i * 1111), uint16(44<<9 | 3<<5 | 1 + i%28)}
		switch i % 5 {
		case 1:
			e.descriptor = 16
		case 2:
			e.comment = "written by hand"
		case 3: // an extended timestamp (0x5455), whose local and central forms are the same
			e.extra = "UT\x05\x00\x01abcd"
			e.localExtra = e.extra
		case 4:
			e.extra = "\xFE\xCA\x00\x00"
		}
	}
	return append(list, entry{name: "xl/media/", store: true})
}

// richTypes are the content types of the rich book.
const richTypes = xmlHead + `<Types xmlns="` + packSpace + `content-types"><Default Extension="bin" ContentType="application/vnd.ms-office.vbaProject"/><Default Extension="png" ContentType="image/png"/><Default Extension="rels" ContentType="application/vnd.openxmlformats-package.relationships+xml"/>` +
	`<Default Extension="vml" ContentType="application/vnd.openxmlformats-officedocument.vmlDrawing"/><Default Extension="xml" ContentType="application/xml"/><Default Extension="dat" ContentType="application/octet-stream"/><Default Extension="part" ContentType="application/octet-stream"/>` +
	`<Override PartName="/xl/workbook.xml" ContentType="application/vnd.ms-excel.sheet.macroEnabled.main+xml"/><Override PartName="/xl/worksheets/sheet1.xml" ContentType="application/vnd.openxmlformats-officedocument.spreadsheetml.worksheet+xml"/>` +
	`<Override PartName="/xl/worksheets/sheet2.xml" ContentType="application/vnd.openxmlformats-officedocument.spreadsheetml.worksheet+xml"/><Override PartName="/xl/tables/table1.xml" ContentType="application/vnd.openxmlformats-officedocument.spreadsheetml.table+xml"/></Types>`
