"""Type families of parts that insulate between their sides, and of jacks that hold a transformer.

Written from general knowledge of the trade; makers' data sheets agree on what each series is (from memory, not checked sheet
by sheet). A missing family does no harm: words, pins and the circuit are looked at next. A family that is too wide does,
so each pattern names a series with its digits. How patterns are read: see checker.identify.families.
"""

from __future__ import annotations

# kind, what the series is, attributes, patterns. The first pattern that matches wins, from top to bottom.
Row = tuple[str, str, dict[str, str], str]

_V = "(?:03|05|09|12|15|24|48)"  # a voltage inside a converter's type: 0505 is 5 V in, 5 V out

COUPLERS: tuple[Row, ...] = (
    (
        "optocoupler",
        "opto-triac",
        {"output": "triac"},
        r"K?MOC3\d{3} TLP(?:16[0-8]|26[0-8]|36[0-8]|30[25-8]\d|3616|37[68]2|525|541|545|548|56[01]) IL4(?:10|20|[12]\d\d|08)"
        r" EL30\d\d"
        r" FOD4\d{2,3} FODM30\d\d VO30\d\d VO4[12]5\d VOM160 VOT8\d{3} K30[12]\d H11J\d S21ME\d S2S\d PC[34]S[DFT]\d\d"
        r" LTV-?30\d\d"
        r" CTM?30\d\d ORM?-?30\d\d BRT\d\d TIL30[12]\d QT30\d\d OPI30\d\d",
    ),
    ("optocoupler", "photothyristor coupler", {"output": "thyristor"}, r"4N40 H11C\d TLP54[1-8]"),
    (
        "solid-state-relay",
        "alternating-current solid-state relay",
        {"output": "triac"},
        r"AQ[AGHJ]\d G3(?:MB|MC|M|NA|NE|PA|PB|PE|S|F|H|B|TA|TB|CN|J|ZA)-\w CPC19(?:6\d|7\d|43) S[12]\d\d[ST]\d{1,2}"
        r" PR[23]\dM[AF] SSR-?\d{2,3}[AD]A",
    ),
    (
        "solid-state-relay",
        "photo relay",
        {},
        r"G?AQ[SVWY]\d AQZ[12]\d KAQ[VWY]\d CPC1[0-24-9]\d\d CPC2\d{3} G3VM G3DZ ASSR-?\d{4} HSSR-?\d{4} VO1[34]\d{2,3}"
        r" VOR\d{4} LH1\d{3}"
        r" TLP(?:17\d|19[2-9]|20\d|22\d|24\d|3[1-58]\d\d|4[018]\d\d|59[2-9]|79[78]) PV[ADGNRTUXZ][A-Z]?\d{3,4} PVI\d{4}"
        r" PS7\d{3} PS710"
        r" (?:LCA|LCB|LCC|LAA|LBA|LBB|PLA|PLB|PAA|PBB|XAA|XCA|OAA|OMA)\d{2,3} EL[46]\d\dA HFS\d{1,2} SSR-?\d{2,3}DD VO14642",
    ),
    (
        "optocoupler",
        "817-type coupler",
        {"output": "transistor"},
        r"(?:PC|LTV-?|EL|TLP|KPC|KP|K|OR|ORPC-?|CT-?|BPC-?|BL|KB|MPC|NPC|QPC|EE|HPC|SFH|FODM?|SL|ISP?|TD|XL|UMW|OPIA?|CYPC|MOC|TPC|UPC|MB|QX|PS)-?8[1-5][1-7]"
        r" 817[A-DS]?\d?C?$ 8[14][467][A-D]$",
    ),
    (
        "optocoupler",
        "gate-drive coupler",
        {"output": "driver"},
        r"(?:HCPL|ACPL)-?(?:J|H|P|W|K|T)?3[0-4]\w{1,2} TLP(?:15\d|25[01]|35\d|57\d\d|52\d\d|70\d) FOD3\d{3} FOD83\d\d"
        r" PC92[3-9] VO31[025]\d VO[DW]3\d{3} PS95\d\d"
        r" EL31\d\d ACNW-?3\d{3} ACN[TUV]-?\w{3,5} ACFJ-?\w{3,5} ICPL-?3\d{3}",
    ),
    (
        "isolated-amplifier",
        "coupler-based isolation amplifier",
        {},
        r"(?:HCPL|ACPL)-?(?:C7\w|C8\w|78\w|79\w|7[5-9]\d\d) TLP78[23]0 TLP7920",
    ),
    (
        "optocoupler",
        "logic coupler",
        {"output": "logic"},
        r"(?:IS|EL|KP|CT|OR-?|UMW|LTV-?)?6N1(?:3[4-9]|40) HCPL-?[A-Z]?\d{3,4} HCNW-?\d{3,4} HCNR-?20\d ACPL-?[A-Z]{0,2}\d{2,4}"
        r" ACNW-?\d{3,4} ACSL-?\d{4} ACFL-?\d{4}"
        r" ISOM8\d{3} ELW?13[5-9] ELM\d{3,4} EL(?:05|06|26|45)\d\d H11[LN]\d PC90\d PC4[01]\d[LS] VO(?:06|22|26|46)\d\d"
        r" PS[89]\d{3} RV1S9\d{3} TLX9\d{3} TLPN\d{3}",
    ),
    (
        "optocoupler",
        "transistor coupler",
        {"output": "transistor"},
        r"4N(?:2[5-9]|3\d|4[5-9]) CNY\d\d CNX\d\d CNW\d\d MCT[2569] MCA2\d\d TIL(?:1\d\d|19\d) H11[A-GV]\w?\d HMHA\w?\d{3,4}"
        r" HMA\d{3} MOCD?\d{3,4}"
        r" IL(?:74|55|66|20[5-8]|21[1-7]|22[1-3]|25[0-8]|30[0-2]|388|76[67]) IL[DQ]\d{1,3} ILCT6 SFH6\d{2,3} VO\d{3,4}"
        r" VO[LMSTDH]A?\d{3,4} TC(?:ET|LT|MT|ED|DT)\d{4}"
        r" PC(?:1[0-2]\d|35[4-7]|36[4-7]|3[HQ]\d\d?|40\d|41\d|45[27]|51\d|7[0-4]\d|8\d\d|9\d\d) LTV-?[A-Z]{0,4}\d{1,3}"
        r" TLP\d{3,4} FOD[A-Z]?\d{2,4} PS2\d{3}"
        r" EL(?:8\d\d|35[47]|3H[47]|10[12]\d|111\d|121N|181|2[01]\d|4N\d\d|D2\d\d|Q3H|CNY17|H11) IS(?:P|D|Q)\d{2,3}"
        r" IS(?:181|2[0178]\d|35[457]|121|127|60[45]|4N\d\d)"
        r" K(?:PC?|PS)?10[1-4]0\d? K(?:817|827|847) KPC\d{3} KPS28\d\d CT(?:101\d|35[47]|281|4[45]\d\d)"
        r" OR-?(?:35[67]|3H[47]|100[89]) LOC[12]1\d LDA\d{3} LIA1\d\d CPC13\d\d"
        r" OPI[A-Z]?\d{3,4} SPX7\d{3} NTE304\d ECG304\d CNC1S\d{3} CNZ3\d{3}",
    ),
)

ISOLATORS: tuple[Row, ...] = (
    (
        "isolated-driver",
        "isolated gate driver",
        {},
        r"UCC2[13]\d{3} UCC5(?:3\d\d|8[78]\d) ISO5[4-9]\d\d SI82[2-8][0-9A-Z]{1,2}(?!E?DB)"
        r" ADUM(?:3123|322[0134]|41(?:2[0-2]|3[5-8]|46|77)|422[1-4]|7223|7234|12[23]\d|6132|5230)"
        r" 1ED[BCFISU]\w 1ED[03]\w 1EBN\d 2ED[BFRS]\w 2ED0\d NC[DV]57\d{3} NC[PV]51[56][67]\d STGAP\w NSI6\d{3} CA-?IS32\d\d"
        r" MAX2270\d BM6[01][0-9S]\w SI[DC]11\d\d"
        r" SLMI\d{2,4} BTD5\d{3} BTD25\d{3} MP188\d\d (?:MC33)?GD31[06]\d PAI8\d\d 2S[CP]0\d{3} M579\d\d EXB84\d",
    ),
    (
        "isolated-amplifier",
        "isolated amplifier or modulator",
        {},
        r"AMC1(?:100|106|[2-4]\d\d|31M) AMC0[1-9]\d\d AMC23\w AMC3\d{3} SI89\d\d(?!E?DB) NSI1[23]\d\d CA-?IS1\d{3} ISO1[0-3]\d"
        r" ISO22[46] AD20[2-8] AD21[05] AD740[0-5]"
        r" ADUM(?:[34]19[05]|770\d) MAX1400[12] MAX2253[0-2] HCPL-?788J",
    ),
    (
        "digital-isolator",
        "digital isolator",
        {},
        r"ADUM\d{3,4} ADM2(?:48|49|58|68|79|86)\d ADM3(?:05|25|26)\d ADN46[25]\d ADE79[13]\d ISO(?!7816|7637)7\d{2,3}"
        r" ISO6[47]\d\d ISO1\d{3} ISO3[0-5]\d\d ISO(?:15|35)[MTD]"
        r" ISOW\d{3,4} ISOUSB\d{2,3} ISO[12][HI]8\d\d ISO150 SI8[034678]\d{2,3}(?!E?DB) MAX14(?:8[05]|90)(?!\d)"
        r" MAX148(?:5\d|7[89]|8\d) MAX149[34]\d MAX1413\d MAX1443\d"
        r" MAX22(?:02[4-8]|12\d|14[4-9]|16[3-6]|19[26]|24[4-6]|25[01]|29[0-4]|34[4-6]|41[4-6]|44[4-6]|66[4-6]) MAX1293[0-5]"
        r" MAX3535 MAX3157 MAX3250 LTM28\d\d"
        r" IL(?:7[0-2]\d|26[0-2]|51\d|6[01]\d|3[0-9]85|4[0-9]85|41050) NSI8\d{3} NSI10[45]\d NSIP\d{3,4} NIRSP?\d{2,3}"
        r" CA-?IS\d{4} P(?:I|AI)1[2-6]\d[EMU]\d Π1\d\d"
        r" CMT8[01]\d\d[A-Z] TPT7[27]\d\d NCID9\d{3} STISO6\d\d ACML-?\d{4} ACCL-?9\d{3} DCL5[24]\d ISL32(?:70[45]|74[01])"
        r" ISL71[67]10 RSM3?485 CTM(?:1051|8251)"
        r" TD[35]\d1[DSM]\w UCC1[245]\d{3} UCC33\d{3}",
    ),
)

CONVERTERS: tuple[Row, ...] = (
    (
        "isolated-module",
        "mains power module",
        {"acdc": "yes"},
        r"HLK-?(?:PM\d\d|\d{1,3}[MCD]\d\d) IRM-?\d{2}[MS]?-\d TMLM?-?\d{5} TMLM-?\d{2} TMPS-?\d\d"
        r" L(?:DE?|S|HE?|O|N|B|I|M|F)\d{2}-\d{2}[A-Z]\d RAC\d{2}[A-Z]?-\w"
        r" EC[EFLMP]\d{2}U[ST]\d EML\d{2}US\d M[FP]M-\d{2} PSK-\w\d PBO-\d VSK-S\d VTX-\d{3} PM0[139]$ AP\d\dN\d\d-ZERO"
        r" AMEO?F?L?\d{1,2}-\d CFM\d\d[SD]\d HAW?\d{1,2}-220[SD]",
    ),
    (
        "isolated-module",
        "isolated converter module",
        {},
        rf"[A-H]{_V}{_V}(?:L|X|R|N|M|U)?[SDTMN] [A-H]{_V}{_V}[A-Z]{{0,3}}-\d{{1,2}}W I[A-Z]{{1,2}}{_V}{_V}[A-Z]{{0,2}}"
        rf" {_V}{_V}[SD]?-?\d?W [UVW][RW][ABEF]\d{{4}} PW[AB]\d{{4}}"
        rf" NM[A-Z]\d{{4}} NK[AE]\d{{4}} NT[AEV]{_V}{_V} ND[FLSTY]\d{{4}} NPH\d\d[SD]\d{{4}}"
        rf" (?:ME[AEFJRUV]|CR[ELRV]|NX[EJ]|NCS|MT[CEU]|MGJ)\d[SDQT]\d{{4,6}}"
        rf" R\d\d(?:P\d{{1,3}}|C05|CTE) R\dS[XE]?-\d{{4}} R1[DZ]X?-\d{{4}}"
        rf" R(?:[BDEHIJKLMNOPQSTVWXYZ]|KE|OE|SO|SOE|S\d|EC\d{{1,2}}|EM\d?|P\d{{1,3}}|FMM?|NM)-{_V}\d\d"
        r" T(?:EA|EL|EN|MR|HN|HD|IM|RA|RI|RN|BA|DR|ES|ED|RS|VN|EP|HR|HM|HP|QB|DN|HL)-?\d{1,2}[A-Z]{0,3}-\d{4}"
        r" T(?:M[AEHV]|SM)-?\d{4}[SD] AM\d{1,2}[A-Z]{1,2}-\d{4}"
        r" P(?:DSE?|DME?|DQ\w?|YB|YBE|RM|RQ|EM|ES|QA|QM|QP|QD)\w?\d{0,2}-[DSQ]\d"
        r" (?:SPBW?|DPBW|SKMW?|SKA|SKE|SCW|DCW|SM[AU]|SPUN?|DPU|SPA|SPR|SBT|SUS|MDS|MHB|DK[AEM])\d\d[A-GLMN]"
        r" DC[HPRV]0[12]\w LTM80(?:46|47|48|57|58|67|68) MIE1W\d{4}",
    ),
)

RELAYS: tuple[Row, ...] = (
    (
        "relay",
        "relay",
        {},
        r"G5(?:LE|LA|LB|LC|CA|NB|RL|SB|PA)\w? G5[ANQSTVY]-\w G2R[A-Z]{0,2}-\w G2RL\w? G6[A-Z]{1,2}-\w G[789][A-Z]{1,2}-\w"
        r" S(?:RD|LA|LC|LD|RA|RC|RSB?|RU|MIH?|TA)-[A-Z-]{0,4}\d\dVDC SR[ADU]-SH?-\d{3}D HF\d{1,3}F HFD\d{1,2} HFE\d{1,2}"
        r" HFV\d{1,2} J(?:QC|ZC|QX|QW)-\w JRC-\d{1,2}[FM] J(?:QC|ZC|QX)\d"
        r" RT[1-4BDEHP]\d\d[0-9AF]\d\d (?:3[0-9]|4[0-9]|5[05]|6[026])\.\d\d\.\d TQ2\w{0,2}-\w TX[SD]?2\w{0,2}-\w"
        r" ALQ\d{3} APAN\d{4} ALDP?\d{3} AL[EZ]\w?\d{2} AG[NQ]\d{3} APF\d{3}"
        r" AHN\d{5} JW[12]A?FSN JS1A?F?-\d DS2Y DS[14]E-\w V23\d{3} IM0\d[A-Z] T9A[PSV]\w O(?:JE|MIH?|RWH|UAZ|SA)-S[HS]-\d"
        r" FTR-[A-Z]\w NT(?:7[2-9]|90)[A-Z-] RM(?:8[3-7]|96|50|699)[-A-Z]"
        r" HJR-?\d HK\d{2,4}F (?:DIP|SIL|MS)\d\d-\d[ABC]\d E[ABCDEF]2-\d",
    ),
)

MAGNETICS: tuple[Row, ...] = (
    (
        "connector",
        "jack with transformers inside",
        {"magnetics": "yes"},
        r"H[RY]9\d{5} J00\d\d[A-Z] JK[0M]\w{4} J1B1\d{3} RJP-\d{3}TC\d LPJ[A-Z]{0,2}\d{3,4} RB1-\d{3} ARJM?\d{2} SI-[4-6]\d{4}"
        r" L8\d\d-1[A-Z]1T 08\d\d-?1[A-Z]1T HFJT?1\w?-\d"
        r" TRJG?\d{4} KRJ-\w JFM\d{5} RJL(?:BC|UG|D)-\d RJMG\d MAGJACK",
    ),
    (
        "current-transformer",
        "current transformer",
        {},
        r"ZMCT\d{3} TA\d{2}-\d{2,3} DL-CT\d SCT-?013 AC-?10(?:05|10|15|20|25|30|50) AS-?10[0-4] CST\d{3,4} B82801\w"
        r" PE-?51\d{3}",
    ),
    (
        "transformer",
        "data or signal transformer",
        {},
        r"H(?:1012|1102|1164|1188|1260|1270|2019|5004|5007|5008|5009|5084|5120|6502)(?:NL|$|-) HX[1-5]\d{3} HR6\d{5}"
        r" TG(?:110|1G|43|75|74)-\w HN\d{5} TS6121 TLA-6T\d{3} PE-?6\d{4}"
        r" ST7010 S558-5999 GST5009 LFE8\d{3} ZMPT\d{3}",
    ),
    (
        "hall-sensor",
        "current sensor with an insulated conductor",
        {},
        r"ACS(?:7\d\d|37\d{3}|7\d{4}) TMCS\d{4} MLX912\d\d CC69\d\d CQ-?[23]\d\d\d? L[AV]-?\d{2,3}-?[NPT] LTSR?-?\d{1,2}-?NP"
        r" CAS[RS]?-?\d{1,2}-?NP CKSR-?\d{1,2}-?NP"
        r" HO-?\d{1,3}-?[NS][PM] HXS-?\d\d-?NP HLSR-?\d HTFS-?\d NSM2\d{3} MC[AR]1101 TLI4971 ACHS-?7\d{3} SI85\d\d(?!E?DB)"
        r" WCS\d{4} CT4[1-5]\d",
    ),
)

INSULATING_FAMILIES = COUPLERS + ISOLATORS + CONVERTERS + RELAYS + MAGNETICS
